"""Steady-state interaction, and stability with each loop in manual in turn."""

from __future__ import annotations

import numpy as np

from closed_loop import realise, spectral_radius
from document import Array, Measured, Transfer, Unit
from process import growing_poles


def long_run(transfer: Transfer | Measured) -> tuple[bool, float]:
    """Whether it integrates, and its gain or rate."""
    if isinstance(transfer, Measured):
        integrates = transfer.slope != 0
        return integrates, transfer.slope if integrates else float(transfer.values[-1])
    bottom = transfer.denominator
    if bottom[-1] == 0:
        return True, float(transfer.numerator[-1] / bottom[-2])
    return False, float(transfer.numerator[-1] / bottom[-1])


def gain_rows(unit: Unit, measurements: list[int], sources: list[int]) -> Array:
    """Rows of rates where the measurement integrates any of the inputs, of gains elsewhere."""
    rows = np.zeros((len(measurements), len(sources)))
    for row, measurement in enumerate(measurements):
        found = [
            (sources.index(p.source), *long_run(p.transfer))
            for p in unit.paths
            if p.measurement == measurement and p.source in sources
        ]
        integrates = any(flag for _, flag, _ in found)
        for column, flag, gain in found:
            if flag == integrates:
                rows[row, column] += gain
    return rows


def relative_gains(unit: Unit) -> tuple[Array, float]:
    """The array, and the index of Niederlinski; the inner loops hold their setpoints."""
    outer = [i for i, loop in enumerate(unit.loops) if loop.outer < 0]
    sources: list[int] = []
    for i in outer:
        while unit.loops[i].inner >= 0:
            i = unit.loops[i].inner
        sources.append(unit.loops[i].source)
    outputs = gain_rows(unit, [unit.loops[i].measurement for i in outer], sources)
    inputs = np.eye(len(outer))
    for row, i in enumerate(outer):
        inner = unit.loops[i].inner
        if inner >= 0:
            inputs[row] = gain_rows(unit, [unit.loops[inner].measurement], sources)[0]
    gains = outputs @ np.linalg.inv(inputs)
    return gains * np.linalg.inv(gains).T, float(np.linalg.det(gains) / np.prod(np.diag(gains)))


def stable_in_manual(unit: Unit, loop: int) -> tuple[bool, float]:
    """
    The rest of the unit with this loop, and the loops above it, in manual: their integrators are set
    aside, what runs away by itself is not. With it how far from the edge that was decided.
    """
    automatic = [True] * len(unit.loops)
    at = loop
    measured: list[int] = []
    while at >= 0:
        automatic[at] = False
        measured.append(unit.loops[at].measurement)
        at = unit.loops[at].outer
    driven = {l.source for l in unit.loops}
    for path in unit.paths:
        if path.measurement in measured and path.source in driven:
            if any(pole > 0 for pole in growing_poles(path.transfer)):
                return False, 1.0
    if not any(automatic):
        return True, 1.0
    radius = spectral_radius(realise(unit, automatic))
    return radius < 1, abs(radius - 1)
