"""Margins, peaks and noise: the sampled loops evaluated frequency by frequency, noise by its covariance."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from closed_loop import Realisation, controller_at
from document import Array, Unit
from process import Process, respond, sample

Complex = NDArray[np.complex128]


class SampledLoops:
    """Responses of the sampled closed loops at any angle, all loops closed."""

    def __init__(self, unit: Unit) -> None:
        self.unit = unit
        driven = {loop.source for loop in unit.loops}
        paths = [p for p in unit.paths if p.source in driven]
        self.process: Process = sample(paths, len(unit.measurements), unit.scan)
        self.controllers = [controller_at(loop.settings, unit.scan) for loop in unit.loops]

    def controller_responses(self, angles: Array) -> tuple[Complex, Complex]:
        """From the measurement to minus the output, and from the setpoint to the output: [angle][loop]."""
        q = np.exp(-1j * angles)
        measured, setpoint = [], []
        for c in self.controllers:
            s = c.settings
            integral = c.integral / (1 - q)
            derivative = c.derivative * (1 - q) / (1 - c.derivative_lag * q)
            lag = (1 - c.filter_lag) / (1 - c.filter_lag * q)
            measured.append((c.proportional + integral + derivative) * lag**s.filter_order)
            setpoint.append(s.weight * c.proportional + integral + s.derivative_weight * derivative)
        return np.stack(measured, axis=1), np.stack(setpoint, axis=1)

    def solve(self, angles: Array) -> tuple[Complex, Complex, Complex, Complex]:
        """
        Delivered outputs v = M v + d, d added to each controller's output: the inverse of I - M; with it
        the process from delivered outputs to each loop's measurement, and the controllers.
        """
        unit = self.unit
        loops = unit.loops
        process = respond(self.process, len(unit.measurements), len(unit.sources), angles)
        cy, cr = self.controller_responses(angles)
        n = len(loops)
        moved = np.zeros((len(angles), n, n), complex)
        for i, loop in enumerate(loops):
            for j, other in enumerate(loops):
                if other.source >= 0:
                    moved[:, i, j] = process[:, loop.measurement, other.source]
        m = -cy[:, :, None] * moved
        for i, loop in enumerate(loops):
            if loop.outer >= 0:
                m[:, i, loop.outer] += cr[:, i]
        return np.linalg.inv(np.eye(n) - m), moved, cy, cr

    def sensitivities(self, angles: Array) -> Complex:
        """S of each loop cut at its controller's output: [angle][loop]."""
        inverse, *_ = self.solve(angles)
        return np.diagonal(inverse, axis1=1, axis2=2)

    def singular_values(self, angles: Array) -> tuple[Array, Array]:
        """Largest of S and of T, span-scaled, at the measurements of the outermost loops."""
        inverse, moved, cy, _ = self.solve(angles)
        outer = [i for i, loop in enumerate(self.unit.loops) if loop.outer < 0]
        spans = np.array([self.unit.loops[i].span for i in outer])
        # A disturbance on those measurements passes the controllers and comes back through the process.
        t = (moved @ inverse * cy[:, None, :])[:, outer][:, :, outer] * spans[None, None, :] / spans[None, :, None]
        s = np.eye(len(outer)) - t
        return tuple(np.linalg.svd(x, compute_uv=False)[:, 0] for x in (s, t))


def grid(longest: float, scan: float) -> Array:
    """Even in the logarithm, and even by itself where dead time turns the phase."""
    even = np.linspace(math.pi / 2500, math.pi, 2500)
    return np.unique(np.concatenate([np.geomspace(1e-8, math.pi, 2500), even]))


def peak(values: Array, angles: Array, at) -> float:
    """The largest value, looked at closely between the neighbours of the largest few on the grid."""
    best = float(np.max(values))
    crests = [k for k in np.argsort(values)[-3:] if values[k] > 0.9 * best]
    for k in crests:
        near = np.linspace(angles[max(0, k - 1)], angles[min(len(angles) - 1, k + 1)], 60)
        best = max(best, float(np.max(at(near))))
    return best


def margins(s: Complex, angles: Array, at, scan: float) -> dict[str, float | None]:
    """@param at  S of this loop at any angles"""
    open_loop = 1 / s - 1

    def crossings(measure) -> list[tuple[float, complex]]:
        values = measure(open_loop)
        found: list[tuple[float, complex]] = []
        for k in np.flatnonzero(values[:-1] * values[1:] < 0):
            low, high = angles[k], angles[k + 1]
            for _ in range(3):
                near = np.linspace(low, high, 24)
                between = measure(1 / at(near) - 1)
                j = int(np.flatnonzero(between[:-1] * between[1:] <= 0)[0])
                low, high = near[j], near[j + 1]
            found.append((low, complex((1 / at(np.array([low])) - 1)[0])))
        return found

    # A loop gain of a billion is an integrator at rest: the sign of its other part is rounding.
    reals = [l.real for _, l in crossings(lambda l: l.imag) if -1e9 < l.real < 0]
    for end in (0, -1):
        l = complex(open_loop[end])
        if abs(l.imag) < 1e-6 * abs(l.real) and -1e9 < l.real < 0:
            reals.append(l.real)
    factors = [-1 / r for r in reals]
    units = crossings(lambda l: np.log(np.abs(l)))
    phases = [(angle, math.atan2(l.imag, l.real)) for angle, l in units]
    return {
        "gainMargin": min((f for f in factors if f > 1), default=None),
        "gainReduction": max((f for f in factors if f < 1), default=None),
        "phaseMargin": min((math.degrees(math.pi - abs(p)) for _, p in phases), default=None),
        "delayMargin": min(((p + math.pi) % (2 * math.pi) / a * scan for a, p in phases), default=None),
    }


def covariance(a: Array, q: Array) -> Array:
    """X = a X a' + q for a stable a, by doubling."""
    x, power = q, a
    for _ in range(40):
        step = power @ x @ power.T
        x = x + step
        if np.max(np.abs(step)) <= 1e-13 * np.max(np.abs(x)):
            break
        power = power @ power
    return x


def noise_deviations(unit: Unit, realisation: Realisation, own: int | None = None) -> Array:
    """Standard deviation of each output from white noise on all measurements, or on one."""
    deviations = np.zeros(len(unit.measurements))
    for loop in unit.loops:
        if own is None or loop.measurement == own:
            deviations[loop.measurement] = loop.noise
    scaled = realisation.noise * deviations
    states = covariance(realisation.transition, scaled @ scaled.T)
    fed = realisation.feed * deviations
    variances = np.einsum("ij,jk,ik->i", realisation.read, states, realisation.read) + np.sum(fed**2, axis=1)
    return np.sqrt(variances)


def frequency_figures(unit: Unit, realisation: Realisation) -> tuple[list[dict[str, float | None]], dict[str, float]]:
    """By loop, and of the unit."""
    loops = SampledLoops(unit)
    longest = max((p.transfer.dead_time for p in unit.paths), default=0.0)
    angles = grid(longest, unit.scan)
    s = loops.sensitivities(angles)
    noise = noise_deviations(unit, realisation)
    out: list[dict[str, float | None]] = []
    for i, loop in enumerate(unit.loops):
        def at(near: Array, i: int = i) -> Complex:
            return loops.sensitivities(near)[:, i]

        own = noise_deviations(unit, realisation, loop.measurement)
        out.append(
            {
                "peakSensitivity": peak(np.abs(s[:, i]), angles, lambda near: np.abs(at(near))),
                "peakComplementary": peak(np.abs(1 - s[:, i]), angles, lambda near: np.abs(1 - at(near))),
                **margins(s[:, i], angles, at, unit.scan),
                "outputNoise": float(noise[i]),
                "outputNoiseOwn": float(own[i]),
            }
        )
    largest_s, largest_t = loops.singular_values(angles)
    return out, {
        "peakSingularValueS": peak(largest_s, angles, lambda near: loops.singular_values(near)[0]),
        "peakSingularValueT": peak(largest_t, angles, lambda near: loops.singular_values(near)[1]),
    }
