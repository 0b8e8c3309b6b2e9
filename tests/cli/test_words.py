"""The command line's own mistakes: exit code 2, the nearest word, and the same envelope as everything else."""

from __future__ import annotations

from pathlib import Path

import pytest

from balance.cli.parser import COMMANDS, build_parser


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (["chekc", "x.yaml"], "did you mean `balance check`?"),
        (["grains", "x.yaml"], "did you mean `balance gains`?"),
        (["zzz"], "see `balance --help`"),
        ([], "COMMAND"),
        (["check"], "FILE"),
        (["check", "x.yaml", "--utter"], "--utter"),
        (["schema", "robot"], "machine"),
        (["gains", "x.yaml", "--out", "y"], "--out"),
    ],
)
def test_usage_errors_leave_with_2_and_say_what_is_allowed(command, words: list[str], said: str) -> None:
    answer = command(*words)
    assert answer.code == 2
    assert answer.out == ""
    assert said in answer.err
    assert "Traceback" not in answer.err


def test_usage_errors_come_in_the_envelope_too(command) -> None:
    answer = command("check", "--json")
    assert answer.code == 2
    assert answer.err == ""
    envelope = answer.answer()
    assert envelope["ok"] is False
    assert envelope["command"] == "check"
    assert envelope["exit_code"] == 2
    assert len(envelope["errors"]) == 1
    assert "FILE" in envelope["errors"][0]["message"]


@pytest.mark.parametrize("name", sorted(COMMANDS))
def test_every_command_has_help_with_the_exit_codes(command, name: str) -> None:
    answer = command(name, "--help")
    assert answer.code == 0
    assert "130" in answer.out
    assert all(len(line) <= 80 for line in answer.out.splitlines())


def test_words_may_not_be_cut_short() -> None:
    # a cut-short option would change its meaning the day another one begins alike
    with pytest.raises(Exception, match="--stan"):
        build_parser().parse_args(["check", "x.yaml", "--stan", "every"])


def test_a_file_that_is_not_there(command, tmp_path: Path) -> None:
    answer = command("check", tmp_path / "none.yaml", "--json")
    assert answer.code == 2
    assert answer.answer()["errors"][0]["file"] == str(tmp_path / "none.yaml")


def test_a_machine_file_in_place_of_a_design_file(command, root: Path) -> None:
    answer = command("gains", root / "plants" / "bench-rig.yaml")
    assert answer.code == 2
    assert "a design file" in answer.err


def test_a_design_that_names_no_machine_file_is_told_the_nearest(command, root: Path, tmp_path: Path) -> None:
    (tmp_path / "rig.yaml").write_text("format: 1\n", encoding="utf-8")
    text = (root / "designs" / "bench-rig.yaml").read_text(encoding="utf-8")
    (tmp_path / "d.yaml").write_text(text.replace("../plants/bench-rig.yaml", "rigg.yaml"), encoding="utf-8")
    answer = command("check", tmp_path / "d.yaml", "--json")
    assert answer.code == 2
    error = answer.answer()["errors"][0]
    assert error["key"] == "machine"
    assert error["line"] == text[: text.index("machine:")].count("\n") + 1
    assert "rig.yaml" in error["hint"]


def test_an_unknown_stance_on_the_command_line(command, root: Path) -> None:
    answer = command("gains", root / "designs" / "scout-wheels.yaml", "--stance", "on-left-rigt")
    assert answer.code == 2
    assert "did you mean `on-left-right`?" in answer.err
    assert "on-fore-left" in answer.err


def test_the_schemas_are_json_schemas(command) -> None:
    from jsonschema import Draft202012Validator

    for which in ("machine", "design"):
        schema = command("schema", which, "--json").answer()["schema"]
        Draft202012Validator.check_schema(schema)
        assert which in schema["properties"]
