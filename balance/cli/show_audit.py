"""What `--audit` adds: by how much finer steps change the trials."""

from __future__ import annotations

import math
from typing import Any

from balance.api.audit import audit, json_audit
from balance.api.load import Job
from balance.api.tell import Tell
from balance.base.tables import text_table
from balance.cli.words import folded
from balance.design.records import Design
from balance.simulate.audit import Audit


def with_audit(job: Job, designs: tuple[Design, ...], answer: dict[str, Any], text: str, tell: Tell) -> str:
    """Run the audit, put it into `answer`, return `text` with it; a verdict that hangs on the step is not passed."""
    audits = audit(job, designs, tell)
    answer.update(json_audit(audits))
    answer["passed"] = bool(answer["passed"]) and all(a.same_verdict for a in audits)
    return f"{text}\n\n{show_audit(audits)}" if audits else text


def show_audit(audits: tuple[Audit, ...]) -> str:
    """Return the largest differences per stance, and every trial whose verdict changes."""
    stances = dict.fromkeys(a.stance for a in audits)
    rows = [_row(stance, [a for a in audits if a.stance == stance]) for stance in stances]
    head = ["stance", "trials", "lean differs by", "momentum by", "verdicts"]
    changed = [folded(f"{a.name} {a.toward} ({a.stance}): {a.verdict}; in finer steps: {a.finer_verdict}")
               for a in audits if not a.same_verdict]
    return "\n".join(["audit: every trial once more in steps a quarter as long", text_table(head, rows, "lrrrl"), *changed])


def _row(stance: str, audits: list[Audit]) -> list[str]:
    other = sum(not a.same_verdict for a in audits)
    return [stance, str(len(audits)), f"{math.degrees(max(a.lean for a in audits)):.1e}°",
            f"{100.0 * max(a.momentum for a in audits):.1e} %", f"{other} change" if other else "all the same"]
