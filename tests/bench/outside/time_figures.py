"""What the records of the upsets say of each loop."""

from __future__ import annotations

import numpy as np

from closed_loop import Records, Upset
from document import Unit

Figures = dict[str, float | None]


def upset_figures(unit: Unit, upsets: list[Upset], records: Records, step: float) -> list[list[Figures]]:
    """[upset][loop]; the error of a sample is held until the next."""
    error = records.setpoint - records.measured
    size = np.abs(error)
    moves = np.abs(np.diff(records.out, axis=0, prepend=0.0))
    time = step * np.arange(len(error))[:, None, None]
    iae = step * size[:-1].sum(axis=0)
    itae = step * (size * time)[:-1].sum(axis=0)
    peak, travel, move = size.max(axis=0), moves.sum(axis=0), moves.max(axis=0)
    out: list[list[Figures]] = []
    for r, upset in enumerate(upsets):
        row: list[Figures] = []
        for i, loop in enumerate(unit.loops):
            own = upset.kind == "setpoint" and upset.loop == i
            band = 0.05 * abs(upset.size) if own else loop.tolerance
            outside = np.flatnonzero(size[:, i, r] > band)
            last = int(outside[-1]) if len(outside) else -1
            row.append(
                {
                    "iae": float(iae[i, r]),
                    "itae": float(itae[i, r]),
                    "peakDeviation": float(peak[i, r]),
                    "overshoot": max(0.0, float(np.max(-error[:, i, r] / upset.size))) * 100 if own else None,
                    "settlingTime": (last + 1) * step if last < len(error) - 1 else None,
                    "travel": float(travel[i, r]),
                    "peakMove": float(move[i, r]),
                    "peakRate": float(move[i, r]) / unit.scan,
                }
            )
        out.append(row)
    return out


def loop_figures(unit: Unit, upsets: list[Upset], figures: list[list[Figures]]) -> list[Figures]:
    """Over all upsets."""
    loops = range(len(unit.loops))
    out: list[Figures] = []
    for i in loops:
        counted = [u for u, upset in enumerate(upsets) if not upset.opened or upset.loop == i]
        seen = [u for u, upset in enumerate(upsets) if i not in upset.opened]
        own = next((u for u, upset in enumerate(upsets) if upset.kind == "setpoint" and upset.loop == i), None)
        others = [u for u in seen if upsets[u].kind != "setpoint"]
        elsewhere: float | None = None
        if own is not None:
            elsewhere = max(
                [
                    figures[own][j]["peakDeviation"] / unit.loops[j].tolerance
                    for j in loops
                    if j != i and j not in upsets[own].opened and unit.loops[j].outer < 0
                ],
                default=0.0,
            )
        out.append(
            {
                "iae": sum(unit.upset_weights[upsets[u].kind] * figures[u][i]["iae"] for u in counted),
                "overshoot": figures[own][i]["overshoot"] if own is not None else None,
                "settlingTime": figures[own][i]["settlingTime"] if own is not None else None,
                "peakDeviation": max([figures[u][i]["peakDeviation"] for u in others], default=None),
                "peakMove": max(figures[u][i]["peakMove"] for u in seen),
                "peakRate": max(figures[u][i]["peakRate"] for u in seen),
                "travel": sum(figures[u][i]["travel"] for u in seen),
                "upsetToOthers": elsewhere,
            }
        )
    return out
