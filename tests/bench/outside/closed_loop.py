"""The closed loops from one step to the next, for many runs at once: a run a column."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from document import Array, Settings, Unit
from process import Process, sample


@dataclass(frozen=True)
class Controller:
    """The position algorithm at one scan, lags exponentially exact, differences backward."""

    proportional: float
    integral: float
    derivative: float
    derivative_lag: float
    filter_lag: float
    settings: Settings


def controller_at(settings: Settings, scan: float) -> Controller:
    s = settings
    derivative_lag = math.exp(-scan * s.derivative_gain / s.td) if s.td > 0 else 0.0
    return Controller(
        proportional=s.kc,
        integral=s.kc * scan / s.ti,
        derivative=s.kc * s.td / scan * (1 - derivative_lag),
        derivative_lag=derivative_lag,
        filter_lag=math.exp(-scan / s.tf) if s.tf > 0 else 0.0,
        settings=s,
    )


class Scans:
    """The memory of all controllers, [loop][run], and one scan of any of them."""

    rows = 5

    def __init__(self, unit: Unit, runs: int, limited: bool) -> None:
        self.unit = unit
        self.limited = limited
        self.controllers = [controller_at(loop.settings, unit.scan) for loop in unit.loops]
        self.memory = np.zeros((len(unit.loops), self.rows, runs))
        """First and second filter lag, derivative, its input, integral."""
        self.out = np.zeros((len(unit.loops), runs))
        self.stuck = np.zeros((len(unit.loops), runs))
        """The direction in which more output is of no use."""
        self.delivered = np.zeros((len(unit.loops), runs))
        """The PV of the last scan."""

    def scan(self, i: int, setpoint: Array, measured: Array, active: Array) -> None:
        c, loop, memory = self.controllers[i], self.unit.loops[i], self.memory[i]
        s = c.settings
        first = c.filter_lag * memory[0] + (1 - c.filter_lag) * measured
        second = c.filter_lag * memory[1] + (1 - c.filter_lag) * first
        filtered = second if s.filter_order == 2 else first
        proportional = c.proportional * (s.weight * setpoint - filtered)
        into = s.derivative_weight * setpoint - filtered
        derivative = c.derivative_lag * memory[2] + c.derivative * (into - memory[3])
        increment = c.integral * (setpoint - filtered)
        blocked = np.zeros_like(measured)
        if loop.inner >= 0:
            blocked = self.stuck[loop.inner] * np.sign(self.controllers[loop.inner].proportional)
            # External reset: what is too much falls back, in the integral time, to where the output at
            # no error is what the inner loop delivers.
            excess = self.delivered[loop.inner] - c.proportional * (s.weight - 1) * setpoint - memory[4]
            back = min(1.0, c.integral / c.proportional) * np.where(excess * blocked < 0, excess, 0.0)
            increment = np.where(increment * blocked > 0, back, increment)
        integral = memory[4] + increment
        out = proportional + integral + derivative
        if self.limited:
            wanted = out
            reach = loop.rate * self.unit.scan
            low, high = np.maximum(loop.low, self.out[i] - reach), np.minimum(loop.high, self.out[i] + reach)
            out = np.clip(wanted, low, high)
            self.stuck[i] = np.where(wanted > high, 1.0, np.where(wanted < low, -1.0, np.sign(blocked)))
            if c.integral != 0:
                integral = np.where(out != wanted, out - proportional - derivative, integral)
        self.memory[i] = np.where(active, np.stack([first, second, derivative, into, integral]), memory)
        self.out[i] = np.where(active, out, self.out[i])
        self.delivered[i] = np.where(active, measured, self.delivered[i])


def driven_paths(unit: Unit, automatic: list[bool]) -> list:
    """Paths that lie inside the closed loops."""
    sources = {l.source for l, on in zip(unit.loops, automatic) if on and l.source >= 0}
    measured = {l.measurement for l, on in zip(unit.loops, automatic) if on}
    return [p for p in unit.paths if p.source in sources and p.measurement in measured]


@dataclass(frozen=True)
class Realisation:
    """z[k+1] = transition z[k] + noise n[k]; the loops' outputs are read z[k] + feed n[k]."""

    transition: Array
    noise: Array
    read: Array
    feed: Array


def realise(unit: Unit, automatic: list[bool], factors: Array | None = None) -> Realisation:
    """
    The matrix that carries the linear closed loops from scan to scan, written down by running each state
    alone: process states, past inputs, controllers.
    @param factors  by loop, on what its controller's output does
    """
    process = sample(driven_paths(unit, automatic), len(unit.measurements), unit.scan)
    gain = np.ones(len(unit.loops)) if factors is None else factors
    on = [i for i in unit.order if automatic[i]]
    driving = [i for i in on if unit.loops[i].source >= 0]
    n, depth = len(process.transition), process.depth
    past = n + len(driving) * depth
    width = Scans.rows
    order = past + len(on) * width
    noises = len(unit.measurements)
    runs = order + noises
    z = np.zeros((order, runs))
    z[:, :order] = np.eye(order)
    noise = np.zeros((noises, runs))
    noise[:, order:] = np.eye(noises)

    measured = process.output @ z[:n] + noise
    inputs = np.zeros((len(unit.sources), depth, runs))
    for row, i in enumerate(driving):
        inputs[unit.loops[i].source] = z[n + row * depth : n + (row + 1) * depth]
    for c in process.channels:
        if c.direct != 0:
            measured[c.measurement] += c.direct * inputs[c.source, c.direct_delay - 1]
    scans = Scans(unit, runs, limited=False)
    for row, i in enumerate(on):
        scans.memory[i] = z[past + row * width : past + (row + 1) * width]
    for i in on:
        loop = unit.loops[i]
        is_driven = loop.outer >= 0 and automatic[loop.outer]
        setpoint = scans.out[loop.outer] * gain[loop.outer] if is_driven else np.zeros(runs)
        scans.scan(i, setpoint, measured[loop.measurement], np.ones(runs, bool))
    fresh = np.zeros((len(unit.sources), depth + 1, runs))
    fresh[:, 1:] = inputs
    for i in driving:
        fresh[unit.loops[i].source, 0] = gain[i] * scans.out[i]
    now = np.stack([fresh[c.source, c.delay] for c in process.channels])
    before = np.stack([fresh[c.source, c.delay + 1] for c in process.channels])
    after = np.zeros((order, runs))
    after[:n] = process.transition @ z[:n] + process.now() @ now + process.before() @ before
    for row, i in enumerate(driving):
        after[n + row * depth : n + (row + 1) * depth] = fresh[unit.loops[i].source, :depth]
    for row, i in enumerate(on):
        after[past + row * width : past + (row + 1) * width] = scans.memory[i]
    # Controllers keep an integral that no input reaches where they have none, and lags they do not use.
    used = np.ones(order, bool)
    for row, i in enumerate(on):
        if scans.controllers[i].integral == 0:
            used[past + row * width + 4] = False
    keep = np.flatnonzero(used)
    return Realisation(
        after[np.ix_(keep, keep)], after[keep, order:], scans.out[:, keep], scans.out[:, order:]
    )


def spectral_radius(realisation: Realisation) -> float:
    return float(np.max(np.abs(np.linalg.eigvals(realisation.transition)), initial=0.0))


@dataclass(frozen=True)
class Upset:
    kind: str
    tag: str
    loop: int
    source: int
    size: float
    opened: list[int]


def upsets_of(unit: Unit) -> list[Upset]:
    """Setpoint steps, an inner loop's with its outer loops in manual; load steps; disturbances."""

    def above(i: int) -> list[int]:
        outer = unit.loops[i].outer
        return [] if outer < 0 else [outer, *above(outer)]

    loops = list(enumerate(unit.loops))
    setpoints = [Upset("setpoint", l.tag, i, -1, l.setpoint_step, above(i)) for i, l in loops]
    loads = [Upset("load", l.tag, i, l.source, l.load_step, []) for i, l in loops if l.source >= 0]
    disturbances = [Upset("disturbance", tag, -1, s, size, []) for s, tag, size in unit.disturbances]
    return [u for u in [*setpoints, *loads, *disturbances] if u.size != 0]


@dataclass(frozen=True)
class Records:
    """[sample][loop][upset]"""

    measured: Array
    setpoint: Array
    out: Array


def simulate(unit: Unit, upsets: list[Upset], step: float, steps: int) -> Records:
    """All upsets from rest, side by side."""
    process: Process = sample(unit.paths, len(unit.measurements), step)
    every = round(unit.scan / step)
    runs, loops = len(upsets), len(unit.loops)
    scans = Scans(unit, runs, limited=True)
    active = np.array([[i not in u.opened for u in upsets] for i in range(loops)])
    own_setpoint = np.zeros((loops, runs))
    pushed = np.zeros((len(unit.sources), runs))
    for r, u in enumerate(upsets):
        if u.kind == "setpoint":
            own_setpoint[u.loop, r] = u.size
        else:
            pushed[u.source, r] = u.size
    lead = process.depth
    inputs = np.zeros((lead + steps + 1, len(unit.sources), runs))
    sources = np.array([c.source for c in process.channels])
    delays = np.array([c.delay for c in process.channels])
    direct = [c for c in process.channels if c.direct != 0]
    direct_sources = np.array([c.source for c in direct], int)
    direct_delays = np.array([c.direct_delay for c in direct], int)
    by_direct = np.zeros((len(unit.measurements), len(direct)))
    for column, c in enumerate(direct):
        by_direct[c.measurement, column] = c.direct
    by_now, by_before = process.now(), process.before()
    x = np.zeros((len(process.transition), runs))
    records = Records(*(np.zeros((steps + 1, loops, runs)) for _ in range(3)))
    for k in range(steps + 1):
        at = lead + k
        if k > 0:
            now = inputs[at - 1 - delays, sources]
            before = inputs[at - 2 - delays, sources]
            x = process.transition @ x + by_now @ now + by_before @ before
        inputs[at] = pushed
        measured = process.output @ x + by_direct @ inputs[at - direct_delays, direct_sources]
        for i in unit.order:
            loop = unit.loops[i]
            setpoint = own_setpoint[i]
            if loop.outer >= 0:
                setpoint = np.where(active[loop.outer], scans.out[loop.outer], setpoint)
            if k % every == 0:
                scans.scan(i, setpoint, measured[loop.measurement], active[i])
            if loop.source >= 0:
                inputs[at, loop.source] += scans.out[i]
            records.measured[k, i] = measured[loop.measurement]
            records.setpoint[k, i] = setpoint
            records.out[k, i] = scans.out[i]
    return records
