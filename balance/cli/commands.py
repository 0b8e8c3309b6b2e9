"""One function per command: words in, Outcome out.

What computes is imported inside, after the files have been read.
"""

from __future__ import annotations

import argparse
import os
from typing import TYPE_CHECKING

from balance.cli.outcome import MET, UNMET, Outcome
from balance.cli.progress import Progress

if TYPE_CHECKING:
    from balance.api.load import Job
    from balance.design.records import Design


def run(asked: argparse.Namespace) -> Outcome:
    """Run the command that was asked for."""
    commands = {
        "check": run_check,
        "plant": run_plant,
        "gains": run_gains,
        "firmware": run_firmware,
        "recover": run_recover,
        "size": run_size,
        "new": run_new,
        "schema": run_schema,
    }
    with Progress(asked.progress) as progress:
        return commands[asked.command](asked, progress)


def run_plant(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance plant FILE`, where FILE is a machine file or a design file."""
    from balance.api.load import load_body

    body = load_body(asked.file, asked.stance)
    from balance.api.json_plant import json_plant
    from balance.api.plant import plant
    from balance.cli.show_plant import show_plant
    from balance.stance.compared import bench_against_cad
    from balance.stance.statics import statics_of

    plants = plant(body.machine, body.stances, body.fell)
    code = MET if all(p.acts for p in plants) else UNMET
    measured = bench_against_cad(body.machine)
    statics = tuple(statics_of(body.machine, p.stance) for p in plants)
    text, answer = show_plant(plants, measured, statics), json_plant(plants, measured, statics)
    if asked.figure:
        from balance.api.report import figure

        answer["figure"] = figure(body.machine, plants, asked.figure)
        text += f"\n\ndrawing: {answer['figure']}"
    return Outcome(code, text, answer)


def run_gains(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance gains FILE`: the requirements on margins are judged, trials are not run."""
    from balance.api.load import load

    job = load(asked.file, asked.stance)
    from balance.api.gains import gains, one_gain_set
    from balance.api.json_check import json_verdicts
    from balance.api.json_forms import json_forms
    from balance.api.json_gains import json_gains
    from balance.api.json_robust import json_one_gain_set
    from balance.api.judge import judge_loop
    from balance.cli.show_gains import show_gains

    designs = gains(job, progress.tell)
    verdicts, shared = judge_loop(job, designs), one_gain_set(designs)
    answer = {
        "machine": job.machine.machine,
        "design": job.goal.design,
        **json_gains(designs),
        "one_gain_set": json_one_gain_set(shared),
        "forms": [json_forms(d) for d in designs],
        **json_verdicts(verdicts),
    }
    return Outcome(_code(answer), show_gains(designs, verdicts, shared), answer)


def run_firmware(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance firmware FILE`: the law as C; the requirements on margins are judged beside it."""
    from balance.api.load import load

    job = load(asked.file, asked.stance)
    from balance.api.firmware import firmware
    from balance.api.gains import gains
    from balance.api.json_check import json_verdicts
    from balance.api.json_firmware import json_firmware
    from balance.api.judge import judge_loop
    from balance.cli.show_firmware import show_firmware

    folder = asked.out or os.path.join(output_folder(asked.file), "firmware")
    designs = gains(job, progress.tell)
    package, verdicts = firmware(job, designs, folder, progress.tell), judge_loop(job, designs)
    answer = {
        "machine": job.machine.machine,
        "design": job.goal.design,
        **json_firmware(package, folder),
        **json_verdicts(verdicts),
    }
    whole = answer["passed"] and not isinstance(package, str) and not package.refused
    return Outcome(MET if whole else UNMET, show_firmware(package, folder, verdicts), {**answer, "passed": whole})


def run_recover(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance recover FILE`: the trials and the requirements on them."""
    from balance.api.load import load

    job = load(asked.file, asked.stance)
    from balance.api.gains import gains
    from balance.api.json_check import json_verdicts
    from balance.api.json_recover import json_recover
    from balance.api.judge import judge_trials
    from balance.api.recover import recover
    from balance.cli.show_recover import show_recover

    designs = gains(job, progress.tell, worst=False)
    if asked.with_firmware:
        return _recover_compiled(asked, job, designs, progress)
    trials = recover(job, designs, tell=progress.tell)
    verdicts = judge_trials(job, designs, trials)
    answer = {
        "machine": job.machine.machine,
        "design": job.goal.design,
        **json_recover(trials),
        **json_verdicts(verdicts),
    }
    text = show_recover(designs, trials, verdicts)
    if asked.audit:
        from balance.cli.show_audit import with_audit

        text = with_audit(job, designs, answer, text, progress.tell)
    return Outcome(_code(answer), text, answer)


def _recover_compiled(asked: argparse.Namespace, job: Job, designs: tuple[Design, ...], progress: Progress) -> Outcome:
    """The trials on the compiled firmware: its verdicts must be the law's."""
    from balance.api.compiled import recover_compiled
    from balance.api.json_check import json_verdicts
    from balance.api.json_recover import json_recover
    from balance.api.judge import judge_trials
    from balance.cli.show_firmware import show_compiled
    from balance.cli.show_recover import show_recover

    ran = recover_compiled(job, designs, "fixed" if asked.fixed_point else "float", progress.tell)
    if isinstance(ran, str):
        return Outcome(UNMET, f"No firmware to run: {ran}.", {"passed": False, "firmware": {"refused": ran}})
    verdicts = judge_trials(job, designs, ran.trials)
    answer = {
        "machine": job.machine.machine,
        "design": job.goal.design,
        **json_recover(ran.trials),
        **json_verdicts(verdicts),
        "firmware": {
            "refused": "",
            "variant": ran.variant,
            "same_verdicts": not ran.other_verdicts,
            "other_verdicts": list(ran.other_verdicts),
            "peak_lean_apart_rad": ran.peak_lean_apart,
        },
    }
    answer["passed"] = bool(answer["passed"]) and not ran.other_verdicts
    return Outcome(_code(answer), f"{show_recover(designs, ran.trials, verdicts)}\n\n{show_compiled(ran)}", answer)


def run_check(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance check FILE`: the main job, with its report."""
    from balance.api.load import load

    job = load(asked.file, asked.stance)
    from balance.api.check import check
    from balance.api.json_check import json_check
    from balance.api.report import report
    from balance.cli.show_check import show_check

    result = check(job, progress.tell)
    page = report(result, asked.out or output_folder(asked.file), progress.tell)
    answer = {**json_check(result), "report": page}
    text = show_check(result, page)
    if asked.audit:
        from balance.cli.show_audit import with_audit

        text = with_audit(job, result.designs, answer, text, progress.tell)
    return Outcome(_code(answer), text, answer)


def run_size(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance size FILE`: what does the job, ranked; `--apply` writes the lightest that passes the whole check."""
    from balance.api.load import load

    job = load(asked.file, asked.stance)
    from balance.api.json_size import json_size
    from balance.api.size import apply, proved, size, size_figure, size_page, sized_machine
    from balance.cli.show_size import show_size

    state = os.path.join(output_folder(asked.file), "size-state.jsonl")
    if asked.again and os.path.isfile(state):
        os.remove(state)
    found = size(job, max(asked.workers, 1), state, progress.tell)
    page = size_page(found, asked.out or output_folder(asked.file))
    answer, text = {**json_size(found), "report": page}, show_size(found, page)
    if asked.figure:
        answer["figure"] = size_figure(found, asked.figure)
        text += f"\n\nfigure: {asked.figure}"
    chosen = next((c for c in found.best if asked.family in ("", c.candidate.family)), None)
    if asked.apply and chosen is not None:
        machine = sized_machine(found, chosen)
        whole = proved(job, machine, progress.tell)
        answer["applied"] = {"machine_file": apply(found, chosen, asked.apply), "passed": whole.passed,
                             "unmet": [f"{v.name} ({v.stance})" for v in whole.verdicts if not v.passed]}
        text += f"\n\nwrote {asked.apply}: the whole check {'passes' if whole.passed else 'does NOT pass'}"
    return Outcome(_code(answer), text, answer)


def run_new(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance new NAME`: a machine and a design file to start from."""
    from balance.cli.new import write_pair

    machine, design = write_pair(asked.name, asked.folder)
    text = f"wrote {machine}\nwrote {design}\n\nNext: edit both, then run\n  balance check {design}"
    return Outcome(MET, text, {"machine_file": machine, "design_file": design})


def run_schema(asked: argparse.Namespace, progress: Progress) -> Outcome:
    """`balance schema machine|design`: with `--json` the schema stands under the envelope's `schema`."""
    import json

    from balance.files.schema import json_schema
    from balance.goal.goal import Goal
    from balance.machine.machine import Machine

    schema = json_schema(Machine if asked.which == "machine" else Goal)
    return Outcome(MET, json.dumps(schema, indent=2, ensure_ascii=False), {"schema": schema})


def output_folder(design_file: str) -> str:
    """Return the folder named like the design file, beside it."""
    return os.path.splitext(design_file)[0] if design_file.endswith((".yaml", ".yml")) else design_file + "-report"


def _code(answer: dict[str, object]) -> int:
    return MET if answer["passed"] else UNMET
