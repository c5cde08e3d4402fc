"""The process between two samples, solved exactly for inputs that are held: scipy's matrix exponential."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from scipy.linalg import block_diag, expm
from scipy.signal import tf2ss

from document import Array, Measured, Path, Transfer


@dataclass(frozen=True)
class Channel:
    """x[k+1] = transition x[k] + now u[k-delay] + before u[k-delay-1]; y = output x + direct u[k-direct_delay]."""

    source: int
    measurement: int
    states: slice
    now: Array
    before: Array
    direct: float
    delay: int
    direct_delay: int


@dataclass(frozen=True)
class Process:
    transition: Array
    output: Array
    """[measurement][state]"""
    channels: list[Channel]
    depth: int
    """Past inputs that are needed, in steps."""

    def now(self) -> Array:
        return self._inputs([c.now for c in self.channels])

    def before(self) -> Array:
        return self._inputs([c.before for c in self.channels])

    def _inputs(self, columns: list[Array]) -> Array:
        matrix = np.zeros((len(self.transition), len(self.channels)))
        for c, (channel, column) in enumerate(zip(self.channels, columns)):
            matrix[channel.states, c] = column
        return matrix


def held(a: Array, b: Array, time: float) -> tuple[Array, Array]:
    """exp(a t), and the integral of exp(a s) b ds from 0 to t."""
    n = len(a)
    block = np.zeros((n + 1, n + 1))
    block[:n, :n], block[:n, n:] = a, b
    both = expm(block * time)
    return both[:n, :n], both[:n, n]


def split_delay(dead_time: float, step: float) -> tuple[int, float]:
    """Whole steps, and what is left, as a share of a step."""
    steps = dead_time / step
    whole = math.floor(steps + 1e-9)
    rest = steps - whole
    return whole, rest if rest > 1e-9 else 0.0


def growing_poles(transfer: Transfer | Measured) -> list[float]:
    """Real poles at or right of zero; none of the drawn responses has complex ones there."""
    if isinstance(transfer, Measured):
        return [0.0] if transfer.slope != 0 else []
    poles = np.roots(transfer.denominator)
    edge = 1e-9 * max(abs(poles), default=0.0)
    return [0.0 if abs(p) <= edge else float(p.real) for p in poles if p.real >= -edge]


def without_pole(transfer: Transfer, pole: float) -> tuple[float, Transfer]:
    """residue / (s - pole) and what else the response consists of."""
    rest, _ = np.polydiv(transfer.denominator, [1.0, -pole])
    residue = float(np.polyval(transfer.numerator, pole) / np.polyval(rest, pole))
    other, _ = np.polydiv(np.polysub(transfer.numerator, residue * rest), [1.0, -pole])
    return residue, Transfer(np.atleast_1d(other), np.atleast_1d(rest), transfer.dead_time)


def taps_of(measured: Measured, step: float) -> Array:
    """What a PV gains from inputs held a number of steps ago; a slope that goes on is left out."""
    longest = measured.dead_time + measured.interval * len(measured.values)
    time = step * np.arange(math.ceil(longest / step) + 2)
    bounded = measured.at(time) - measured.slope * np.maximum(0.0, time - measured.dead_time)
    taps = np.diff(bounded, prepend=0.0)
    return np.where(np.abs(taps) > 1e-14 * np.max(np.abs(taps), initial=0.0), taps, 0.0)


def sample(paths: list[Path], measurements: int, step: float) -> Process:
    """
    All paths at one step. Poles at or right of zero into one measurement are one state where they are
    equal, so that nothing drifts that no input and no measurement knows of.
    """
    transitions: list[Array] = []
    outputs: list[tuple[int, Array]] = []
    channels: list[Channel] = []
    shared: dict[tuple[int, float], slice] = {}
    order = 0

    def add(path: Path, a: Array, b: Array, c: Array, d: float, states: slice) -> None:
        delay, rest = split_delay(path.transfer.dead_time, step)
        first, late = held(a, b, rest * step)
        across, early = held(a, b, (1 - rest) * step)
        channels.append(
            Channel(path.source, path.measurement, states, early, across @ late, d, delay, delay + (rest > 0))
        )

    def room(a: Array, c: Array, measurement: int) -> slice:
        nonlocal order
        transitions.append(expm(a * step))
        outputs.append((measurement, c))
        order += len(a)
        return slice(order - len(a), order)

    def pole_state(measurement: int, pole: float) -> slice:
        for (other, at), states in shared.items():
            if other == measurement and math.isclose(at, pole, rel_tol=1e-9):
                return states
        shared[measurement, pole] = room(np.array([[pole]]), np.ones(1), measurement)
        return shared[measurement, pole]

    for path in paths:
        transfer = path.transfer
        if isinstance(transfer, Measured):
            taps = taps_of(transfer, step)
            if transfer.slope != 0:
                a, b = np.zeros((1, 1)), np.array([[transfer.slope]])
                add(path, a, b, np.ones(1), 0.0, pole_state(path.measurement, 0.0))
            nothing = np.zeros(0)
            for delay in np.flatnonzero(taps):
                empty = slice(0, 0)
                channels.append(
                    Channel(path.source, path.measurement, empty, nothing, nothing, taps[delay], 0, int(delay))
                )
            continue
        for pole in growing_poles(transfer):
            residue, transfer = without_pole(transfer, pole)
            a = np.array([[pole]])
            states = pole_state(path.measurement, pole)
            add(path, a, np.array([[residue]]), np.ones(1), 0.0, states)
        if len(transfer.denominator) > 1 and np.any(transfer.numerator):
            a, b, c, d = tf2ss(transfer.numerator, transfer.denominator)
            add(path, a, b, c[0], float(d[0, 0]), room(a, c[0], path.measurement))
        elif np.any(transfer.numerator) and transfer.numerator[-1] != 0:
            raise ValueError("a bare gain is not drawn")
    output = np.zeros((measurements, order))
    at = 0
    for measurement, c in outputs:
        output[measurement, at : at + len(c)] = c
        at += len(c)
    depth = 2 + max((c.direct_delay for c in channels), default=0)
    return Process(block_diag(*transitions) if transitions else np.zeros((0, 0)), output, channels, depth)


def respond(process: Process, measurements: int, sources: int, angles: Array) -> Array:
    """Frequency response [angle][measurement][source] of the sampled process, one channel after the other."""
    z = np.exp(1j * angles)
    out = np.zeros((len(angles), measurements, sources), complex)
    for channel in process.channels:
        n = channel.states
        if n.stop == n.start:
            continue
        a, c = process.transition[n, n], process.output[channel.measurement, n]
        drive = channel.now[None, :] + channel.before[None, :] / z[:, None]
        resolvent = np.linalg.solve(z[:, None, None] * np.eye(len(a)) - a, drive[:, :, None])[:, :, 0]
        out[:, channel.measurement, channel.source] += (resolvent @ c) * z**-channel.delay
    direct: dict[tuple[int, int], list[Channel]] = {}
    for channel in process.channels:
        if channel.direct != 0:
            direct.setdefault((channel.measurement, channel.source), []).append(channel)
    for (measurement, source), taps in direct.items():
        turns = np.exp(-1j * np.outer(angles, [c.direct_delay for c in taps]))
        out[:, measurement, source] += turns @ np.array([c.direct for c in taps])
    return out
