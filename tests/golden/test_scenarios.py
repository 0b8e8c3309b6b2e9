"""Every shipped file through the command line: what passes, what does not and why, and one set of numbers throughout."""

from __future__ import annotations

from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
DESIGNS = sorted(path.stem for path in (ROOT / "designs").glob("*.yaml"))
PLANTS = sorted(path.stem for path in (ROOT / "plants").glob("*.yaml"))
GOOD = ("bench-rig", "bench-rig-kalman", "bench-rig-on-legs", "bench-rig-pid", "bench-rig-sensed", "quay-gyros",
        "scout-built", "scout-wheels")
SHORT = "bench-rig-short"

Answer = dict[str, object]


@pytest.fixture(scope="module")
def checked(tmp_path_factory: pytest.TempPathFactory):
    """Return the answer of `check --json` on a design: each design is checked once for this whole file."""
    import contextlib
    import io
    import json

    from balance.cli.main import main

    kept: dict[str, tuple[int, Answer]] = {}

    def check(name: str) -> tuple[int, Answer]:
        if name not in kept:
            folder = tmp_path_factory.mktemp(name)
            out = io.StringIO()
            with contextlib.redirect_stdout(out):
                code = main(["check", str(ROOT / "designs" / f"{name}.yaml"), "--out", str(folder), "--json"])
            kept[name] = code, json.loads(out.getvalue())
        return kept[name]

    return check


def test_every_shipped_file_is_known_here() -> None:
    assert set(DESIGNS) == {*GOOD, SHORT}
    named = {(ROOT / "designs" / f"{d}.yaml").read_text(encoding="utf-8").partition("../plants/")[2].split(".yaml")[0]
             for d in DESIGNS}
    assert named == set(PLANTS)


@pytest.mark.parametrize("name", GOOD)
def test_the_good_designs_pass_with_every_trial_recovered(checked, name: str) -> None:
    code, answer = checked(name)
    failed = [v for v in answer["verdicts"] if not v["passed"]]
    assert (code, answer["ok"], answer["passed"], failed) == (0, True, True, [])
    trials = answer["recover"]["trials"]
    assert trials
    assert {t["verdict"] for t in trials} == {"recovered"}
    assert {t["toward"] for t in trials} == {"outward", "inward"}
    assert {t["stance"] for t in trials} == {s["stance"] for s in answer["plant"]["stances"]}
    assert all(s["margins"]["stable"] for s in answer["gains"]["stances"])


def test_the_short_wheel_does_not_pass_and_says_what_runs_out_and_by_how_much(checked) -> None:
    code, answer = checked(SHORT)
    assert (code, answer["ok"], answer["passed"]) == (1, True, False)
    fell = [t for t in answer["recover"]["trials"] if t["verdict"] != "recovered"]
    assert fell
    assert any("voltage limit reached" in t["reason"] for t in fell)       # back-EMF on a supply that sags
    reasons = [v["reason"] for v in answer["verdicts"] if not v["passed"]]
    assert all(reasons), "every requirement not met says why"
    assert any("more momentum" in r and "%" in r for r in reasons)
    # its margins are as good as the good rig's: linear margins know no limits
    assert answer["gains"]["stances"][0]["margins"]["stable"]


@pytest.mark.parametrize("name", ["quay-gyros", "scout-wheels", "scout-built"])
def test_both_feet_of_a_walker_stay_where_they_are_in_every_trial(checked, name: str) -> None:
    """Each foot on the line carries some load and holds; three numbers know no feet (the twin)."""
    _, answer = checked(name)
    lines = {s["stance"]: [s["line"]["from"], s["line"]["to"]] for s in answer["plant"]["stances"]}
    for trial in answer["recover"]["trials"]:
        feet = trial["feet"]
        assert [foot["foot"] for foot in feet] == lines[trial["stance"]]
        assert all(foot["least_load_n"] > 0.0 for foot in feet)
        assert all(foot["lift_off_s"] is None and foot["slip_s"] is None for foot in feet)
        assert trial["friction_needed"] == max(foot["friction_needed"] for foot in feet)
    _, rig = checked("bench-rig")
    assert [trial["feet"] for trial in rig["recover"]["trials"]] == [[]] * len(rig["recover"]["trials"])


@pytest.mark.parametrize("name", DESIGNS)
def test_every_design_is_judged_on_its_worst_case_where_tolerances_are_stated(checked, name: str) -> None:
    _, answer = checked(name)
    worst = [v for v in answer["verdicts"] if v["name"].startswith("worst_") or v["name"] == "stable_within_tolerances"]
    stances = [s["stance"] for s in answer["gains"]["stances"]]
    if name == SHORT:  # its machine file states none
        assert worst == []
        assert all(s["worst_case"] is None for s in answer["gains"]["stances"])
        return
    assert all(v["passed"] for v in worst)
    assert [v["stance"] for v in worst if v["name"] == "stable_within_tolerances"] == stances
    assert [v["stance"] for v in worst if v["name"] == "worst_disk_margin"] == stances
    for stance in answer["gains"]["stances"]:
        found = stance["worst_case"]
        assert found["stable"]
        assert found["loops_tried"] > 100
        by_name = {m["margin"]: m for m in found["margins"]}
        for key in ("disk", "modulus", "phase_deg", "gain_upper", "delay_s"):
            assert by_name[key]["worst"] < by_name[key]["nominal"] == stance["margins"][key]
        assert by_name["gain_lower"]["worst"] > by_name["gain_lower"]["nominal"]
        assert all(m["at"] for m in found["margins"]), "each names its cause"


@pytest.mark.parametrize("name", DESIGNS)
def test_every_command_gives_the_same_numbers_as_check(checked, command, name: str) -> None:
    _, whole = checked(name)
    file = ROOT / "designs" / f"{name}.yaml"
    plant = command("plant", file, "--json").answer()
    assert {key: plant[key] for key in whole["plant"]} == whole["plant"]
    gains = command("gains", file, "--json").answer()
    assert gains["stances"] == whole["gains"]["stances"]
    recover = command("recover", file, "--json").answer()
    # the same machine code on the same inputs: equal to the last bit, recording or not
    assert recover["trials"] == whole["recover"]["trials"]
    judged = {(v["name"], v["stance"]): v for v in [*gains["verdicts"], *recover["verdicts"]]}
    assert judged == {(v["name"], v["stance"]): v for v in whole["verdicts"]}


@pytest.mark.parametrize("name", PLANTS)
def test_every_machine_file_alone_gives_the_numbers_of_its_designs(checked, command, name: str) -> None:
    answer = command("plant", ROOT / "plants" / f"{name}.yaml", "--json")
    assert answer.code == 0
    stances = answer.answer()["stances"]
    users = [d for d in DESIGNS if checked(d)[1]["machine"] == name]
    assert users
    for user in users:
        assert checked(user)[1]["plant"]["stances"] == stances


@pytest.mark.parametrize("name", DESIGNS)
def test_the_report_is_one_whole_page(checked, name: str) -> None:
    page = Path(checked(name)[1]["report"])
    text = page.read_text(encoding="utf-8")
    assert text.rstrip().endswith("</html>")
    assert not [p for p in page.parent.iterdir() if p.name != page.name], "nothing half-written is left beside it"


def test_one_stance_alone_gives_its_share_of_every(checked, command) -> None:
    _, whole = checked("scout-wheels")
    alone = command("gains", ROOT / "designs" / "scout-wheels.yaml", "--stance", "on-fore-left", "--json").answer()
    assert alone["stances"] == [s for s in whole["gains"]["stances"] if s["stance"] == "on-fore-left"]


def test_the_report_goes_beside_the_design_file_unless_told(command, tmp_path: Path) -> None:
    for kind, name in (("plants", "bench-rig"), ("designs", "bench-rig")):
        (tmp_path / kind).mkdir()
        text = (ROOT / kind / f"{name}.yaml").read_text(encoding="utf-8")
        (tmp_path / kind / f"{name}.yaml").write_text(text, encoding="utf-8")
    answer = command("check", tmp_path / "designs" / "bench-rig.yaml", "--json").answer()
    assert Path(answer["report"]).parent == tmp_path / "designs" / "bench-rig"
