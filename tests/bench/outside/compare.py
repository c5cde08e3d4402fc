"""
Prints how far Heddle's figures are from those computed here, at most, figure by figure.

usage: compare.py CASES, a list of { "job": document, "evaluation": what Heddle made of it }
"""

from __future__ import annotations

import json
import sys
from dataclasses import dataclass, field

import numpy as np

from closed_loop import realise, simulate, spectral_radius, upsets_of
from document import Json, Unit, read_unit
from frequency_figures import frequency_figures
from interaction import relative_gains, stable_in_manual
from time_figures import loop_figures, upset_figures

ABSOLUTE = {"overshoot": "points", "phaseMargin": "degrees", "settlingTime": "scans"}
"""Figures whose difference is not taken as a share."""


@dataclass
class Disagreement:
    compared: int = 0
    largest: float = 0.0
    where: str = ""
    above: list[str] = field(default_factory=list)
    one_sided: list[str] = field(default_factory=list)


class Ledger:
    def __init__(self) -> None:
        self.rows: dict[str, Disagreement] = {}

    def compare(self, name: str, got: float | None, wanted: float | None, where: str, scale: float) -> None:
        """@param scale  what a share is taken of where the figure itself is next to nothing"""
        row = self.rows.setdefault(name, Disagreement())
        if got is None or wanted is None:
            if got is not wanted:
                row.one_sided.append(f"{where}: {got} here {wanted}")
            return
        row.compared += 1
        figure = name.split(" ")[-1]
        off = abs(got - wanted) / (scale if figure in ABSOLUTE else max(abs(wanted), scale))
        if off > row.largest:
            row.largest, row.where = off, f"{where}: {got:.6g} here {wanted:.6g}"
        if off > 0.005:
            row.above.append(f"{where}: {got:.6g} here {wanted:.6g}")

    def agree(self, name: str, got: bool, wanted: bool, where: str, distance: float) -> None:
        row = self.rows.setdefault(name, Disagreement())
        row.compared += 1
        if got != wanted:
            row.one_sided.append(f"{where}: {got} here {wanted}, {distance:.2g} from the edge")


def points(wanted: float | None) -> float:
    """Of an overshoot: percent of the step, or of itself where a loop at its limits runs away."""
    return max(1.0, (wanted or 0.0) / 100)


def compare_unit(ledger: Ledger, job: Json, evaluation: Json) -> bool:
    unit: Unit = read_unit(job)
    name = job["unit"]["name"]
    scored = evaluation["scored"]["nominal"]
    whole = realise(unit, [True] * len(unit.loops))
    radius = spectral_radius(whole)
    stable = radius < 1
    ledger.agree("unit stable", scored["unit"]["stable"], stable, name, abs(radius - 1))
    if not stable or not scored["unit"]["stable"]:
        return False

    step = evaluation["step"]
    upsets = upsets_of(unit)
    records = simulate(unit, upsets, step, round(evaluation["horizon"] / step))
    by_upset = upset_figures(unit, upsets, records, step)
    listed = {(u["kind"], u["tag"]): u["loops"] for u in scored["upsets"]}
    if set(listed) != {(u.kind, u.tag) for u in upsets}:
        raise ValueError(f"{name}: other upsets")
    for upset, figures in zip(upsets, by_upset):
        for i, loop in enumerate(unit.loops):
            for figure, wanted in figures[i].items():
                got = listed[upset.kind, upset.tag][loop.tag][figure]
                # Next to nothing: a millionth of what the figure is where it is largest.
                most = max((abs(f[figure] or 0.0) for f in figures), default=0.0)
                scale = {"overshoot": points(wanted), "settlingTime": unit.scan}.get(figure, 1e-6 * most + 1e-300)
                ledger.compare(f"upset {figure}", got, wanted, f"{name} {upset.kind} {upset.tag} {loop.tag}", scale)

    by_loop, of_unit = frequency_figures(unit, whole)
    for i, (summary, frequency) in enumerate(zip(loop_figures(unit, upsets, by_upset), by_loop)):
        tag = unit.loops[i].tag
        got = scored["loops"][tag]
        for figure, wanted in {**summary, **frequency}.items():
            scale = {"overshoot": points(wanted), "settlingTime": unit.scan, "phaseMargin": 1.0}.get(figure, 1e-9)
            ledger.compare(f"loop {figure}", got[figure], wanted, f"{name} {tag}", scale)
        manual, distance = stable_in_manual(unit, i)
        ledger.agree("loop stableInManual", got["stableInManual"], manual, f"{name} {tag}", distance)
        for figure in ("gainMargin", "gainReduction"):
            check_edge(ledger, unit, i, figure, got[figure], f"{name} {tag}")
    for figure, wanted in of_unit.items():
        ledger.compare(f"unit {figure}", scored["unit"][figure], wanted, name, 1e-9)
    gains, niederlinski = relative_gains(unit)
    if scored["unit"]["rga"] is not None:
        for got_row, wanted_row in zip(scored["unit"]["rga"], gains):
            for got, wanted in zip(got_row, wanted_row):
                ledger.compare("unit rga", got, float(wanted), name, 1.0)
    ledger.compare("unit niederlinski", scored["unit"]["niederlinski"], niederlinski, name, 1e-9)
    return True


def check_edge(ledger: Ledger, unit: Unit, loop: int, figure: str, factor: float | None, where: str) -> None:
    """A margin is where eigenvalues leave the unit circle, a thousandth before and behind."""
    if factor is None or len(unit.loops) > 3:
        return
    inward = 1 if figure == "gainMargin" else -1
    for side in (-1, 1):
        factors = np.ones(len(unit.loops))
        factors[loop] = factor * (1 + side * 1e-3)
        radius = spectral_radius(realise(unit, [True] * len(unit.loops), factors))
        ledger.agree(f"eigenvalues at {figure}", side != inward, radius < 1, where, abs(radius - 1))


def main(file: str) -> None:
    with open(file, encoding="utf8") as text:
        cases = json.load(text)
    ledger = Ledger()
    stable = 0
    for k, case in enumerate(cases):
        stable += compare_unit(ledger, case["job"], case["evaluation"])
        if (k + 1) % 10 == 0:
            print(f"\rcompared {k + 1} of {len(cases)}", end="", file=sys.stderr, flush=True)
    print(file=sys.stderr)
    print(f"{len(cases)} units, {stable} of them stable; numpy {np.__version__}\n")
    print(f"{'figure':28}{'compared':>9}  {'largest':>9}  {'unit':8}{'> 0.5 %':>8}{'one has none':>14}  where")
    for name, row in ledger.rows.items():
        unit = ABSOLUTE.get(name.split(" ")[-1], "share")
        print(
            f"{name:28}{row.compared:9}  {row.largest:9.2e}  {unit:8}{len(row.above):8}{len(row.one_sided):14}  {row.where}"
        )
    print()
    for name, row in ledger.rows.items():
        for line in [*row.above[:5], *row.one_sided[:5]]:
            print(f"{name}: {line}")


if __name__ == "__main__":
    main(sys.argv[1])
