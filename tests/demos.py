"""The demo field books made again with other seeds, and what fieldfit finds in them held against their truth."""

import importlib.util
import json
import sys
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from types import ModuleType
from typing import Any

from fieldfit import Findings, read_book, reconcile
from fieldfit.fit import Estimate
from fieldfit.report.results import in_unit, kind_of

DATASETS = Path(__file__).parents[1] / "datasets"
DEMOS = {
    "steel_walkway_girders": ".",
    "timber_floor_joists": "timber_floor_joists.xlsx",
    "concrete_transfer_beams": ".",
    "bridge_girders_vehicle": ".",
    "concrete_floor_retest": ".",
    "cyclic_floor_beams": ".",
    "levelled_bridge_pier": ".",
    "footbridge_logged_test": ".",
}


@dataclass(frozen=True)
class Outcome:
    """What one run of a demo came to."""

    inside: dict[str, bool]  # of each planted quantity: whether its interval holds the truth
    flagged: dict[str, bool]  # of each planted member: whether it is beyond
    accused: dict[str, bool]  # of each sound member: whether it is beyond
    ruled: dict[str, bool]  # of each member and rule: whether the load test comes out as planted


def script(demo: str) -> ModuleType:
    """The demo's make.py as a module."""
    sys.path.insert(0, str(DATASETS))
    try:
        spec = importlib.util.spec_from_file_location(f"make_{demo}", DATASETS / demo / "make.py")
        assert spec is not None
        assert spec.loader is not None
        module = importlib.util.module_from_spec(spec)
        spec.loader.exec_module(module)
    finally:
        sys.path.remove(str(DATASETS))
    return module


def run(demo: str, folder: Path, seed: int) -> Outcome:
    """Make a demo with a seed in a folder, reconcile it, and hold the findings against the truth."""
    script(demo).make(folder, seed)
    return held(reconcile(read_book(folder / DEMOS[demo])), folder / "truth.json")


def held(findings: Findings, truth_file: Path) -> Outcome:
    """Findings against the truth beside their book."""
    truth = json.loads(truth_file.read_text(encoding="utf-8"))
    verdict = {one.reconciliation.subject.name: one.verdict for one in findings}
    unreadable = truth.get("unreadable", [])
    return Outcome(
        inside={
            " ".join((row["member"], row["quantity"], row["where"], row.get("stage", ""))): _inside(findings, row)
            for row in truth["estimates"]
            if row["member"] not in unreadable
        },
        flagged={name: verdict[name] == "beyond" for name in truth["planted"]},
        accused={name: verdict[name] == "beyond" for name in truth["sound"]},
        ruled={
            f"{name} {rule}": results(findings, name)[rule] == result
            for name, rules in truth.get("results", {}).items()
            for rule, result in rules.items()
        },
    )


def results(findings: Findings, member: str) -> dict[str, str]:
    """What each rule made of a member's load test."""
    test = findings[member].load_test
    return {outcome.rule.name: outcome.result for outcome in test.outcomes} if test else {}


def _inside(findings: Findings, row: dict[str, Any]) -> bool:
    estimates: Sequence[Estimate] = findings[row["member"]].reconciliation.estimates
    place = (row["quantity"], row["where"], row.get("stage"))
    (estimate,) = (e for e in estimates if (e.quantity, e.where, e.stage) == place)
    if row["of"] == "value":
        low, high = (in_unit(findings.book, kind_of(estimate), end) for end in (estimate.low, estimate.high))
    else:
        low, high = (getattr(estimate, f"{row['of']}_{end}") for end in ("low", "high"))
    return bool((low is None or low <= row["value"]) and (high is None or row["value"] <= high))
