"""Job documents as this comparison needs them: transfer functions and ideal settings, in the job's time unit."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Json = dict[str, Any]

SECONDS = {"s": 1.0, "min": 60.0, "h": 3600.0}


@dataclass(frozen=True)
class Transfer:
    """numerator / denominator in descending powers of s, behind a dead time."""

    numerator: Array
    denominator: Array
    dead_time: float

    def after(self, other: Transfer) -> Transfer:
        return Transfer(
            np.polymul(self.numerator, other.numerator),
            np.polymul(self.denominator, other.denominator),
            self.dead_time + other.dead_time,
        )


@dataclass(frozen=True)
class Measured:
    """The PV after a unit step, straight between values an interval apart, behind a dead time."""

    interval: float
    values: Array
    slope: float
    """That goes on after the last value."""
    dead_time: float

    def at(self, time: Array) -> Array:
        """The PV a time after the step."""
        since = time - self.dead_time
        known = self.interval * np.arange(len(self.values) + 1)
        inside = np.interp(since, known, np.concatenate([[0.0], self.values]))
        return np.where(since <= 0, 0.0, inside + self.slope * np.maximum(0.0, since - known[-1]))


@dataclass(frozen=True)
class Path:
    source: int
    measurement: int
    transfer: Transfer | Measured


@dataclass(frozen=True)
class Settings:
    """Ideal form, engineering units: u = kc (e + integral of e / ti + td de/dt)."""

    kc: float
    ti: float
    td: float
    tf: float
    weight: float
    derivative_weight: float
    derivative_gain: float
    filter_order: int


@dataclass(frozen=True)
class Loop:
    tag: str
    measurement: int
    source: int
    """What it drives, or -1 where that is another loop."""
    inner: int
    outer: int
    low: float
    high: float
    rate: float
    tolerance: float
    weight: float
    span: float
    noise: float
    setpoint_step: float
    load_step: float
    settings: Settings


@dataclass(frozen=True)
class Unit:
    scan: float
    sources: list[str]
    measurements: list[str]
    paths: list[Path]
    loops: list[Loop]
    order: list[int]
    """Every outer loop before the loop it drives."""
    disturbances: list[tuple[int, str, float]]
    upset_weights: dict[str, float]


def transfer_of(model: Json) -> Transfer | Measured:
    dead = model["deadTime"]
    kind = model["kind"]
    if kind == "first-order":
        return Transfer(np.array([model["gain"]]), np.array([model["timeConstant"], 1.0]), dead)
    if kind == "second-order":
        top = model["gain"] * np.array([model.get("lead", 0.0), 1.0])
        if "timeConstants" in model:
            first, second = model["timeConstants"]
            bottom = np.polymul([first, 1.0], [second, 1.0])
        else:
            time = model["period"] / (2 * math.pi)
            bottom = np.array([time * time, 2 * model["damping"] * time, 1.0])
        return Transfer(np.trim_zeros(top, "f"), bottom, dead)
    if kind == "integrating":
        top = model["rate"] * np.array([model.get("lead", 0.0), 1.0])
        bottom = np.trim_zeros(np.array([model.get("timeConstant", 0.0), 1.0, 0.0]), "f")
        return Transfer(np.trim_zeros(top, "f"), bottom, dead)
    if kind == "transfer-function":
        top = np.trim_zeros(np.array(model["numerator"], float), "f")
        return Transfer(top, np.array(model["denominator"], float), dead)
    if kind == "step-response":
        values = np.array(model["values"], float)
        slope = (values[-1] - values[-2]) / model["interval"] if model["integrating"] else 0.0
        return Measured(model["interval"], values, float(slope), dead)
    raise ValueError(f"no transfer function for {kind}")


def paths_of(unit: Json, sources: list[str], measurements: list[str]) -> list[Path]:
    """Every way from a held source to a measurement; chains through other measurements multiplied out."""

    def into(measurement: str) -> list[tuple[int, Transfer | Measured]]:
        ways: list[tuple[int, Transfer | Measured]] = []
        for response in unit["responses"]:
            if response["to"] != measurement:
                continue
            own = transfer_of(response["model"])
            if response["from"] in measurements:
                assert isinstance(own, Transfer), "chains are of transfer functions"
                ways += [(s, own.after(before)) for s, before in into(response["from"])]
            else:
                ways.append((sources.index(response["from"]), own))
        return ways

    return [
        Path(source, m, transfer)
        for m, tag in enumerate(measurements)
        for source, transfer in into(tag)
        if isinstance(transfer, Measured) or np.any(transfer.numerator)
    ]


def settings_of(loop: Json, span: float, output_span: float, unit_seconds: float) -> Settings:
    """What the dialled numbers mean in the ideal form."""
    c, p = loop["controller"], loop["present"]
    scale = SECONDS[c["timeUnit"]] / unit_seconds
    gain = 100.0 / p["gain"] if c["gainIn"] == "proportional-band" else p["gain"]
    integral, derivative = abs(p.get("integral", 0.0)), abs(p.get("derivative", 0.0))
    size = abs(gain)
    has_integral = "I" in c["terms"] and integral > 0
    # Gains of the three terms in the controller's own time unit: P, I per time, D times time.
    if c["form"] == "parallel":
        rate = {"time": lambda: 1 / integral, "repeats": lambda: integral, "gain": lambda: integral}
        integral_gain = rate[c["integralIn"]]() if has_integral else 0.0
        derivative_gain = derivative
    else:
        rate = {"time": lambda: size / integral, "repeats": lambda: size * integral, "gain": lambda: integral}
        integral_gain = rate[c["integralIn"]]() if has_integral else 0.0
        derivative_gain = derivative if c["derivativeIn"] == "gain" else size * derivative
    if "D" not in c["terms"]:
        derivative_gain = 0.0
    proportional = size
    if c["form"] == "series":
        # gain (1 + 1/(Ti s)) (1 + Td s), multiplied out
        proportional = size + integral_gain * derivative_gain / size
    sign = math.copysign(1.0, gain) * (-1.0 if loop.get("action") == "direct" else 1.0)
    engineering = 1.0 if c["gainIn"] == "engineering" else output_span / span
    return Settings(
        kc=sign * proportional * engineering,
        ti=proportional / integral_gain * scale if integral_gain > 0 else math.inf,
        td=derivative_gain / proportional * scale,
        tf=p.get("filter", 0.0) * scale,
        weight=c["setpointWeight"],
        derivative_weight=1.0 if c["derivativeOn"] == "error" else 0.0,
        derivative_gain=c["derivativeGain"],
        filter_order=c["filterOrder"],
    )


def read_unit(job: Json) -> Unit:
    unit = job["unit"]
    seconds = SECONDS[unit["timeUnit"]]
    actuators = {a["tag"]: a for a in unit["actuators"]}
    instruments = {m["tag"]: m for m in unit["measurements"]}
    sources = [*actuators, *(d["tag"] for d in unit["disturbances"])]
    measurements = list(instruments)
    tags = [loop["tag"] for loop in job["loops"]]
    driver = {l["drives"]["loop"]: i for i, l in enumerate(job["loops"]) if isinstance(l["drives"], dict)}
    loops: list[Loop] = []
    for loop in job["loops"]:
        instrument = instruments[loop["measurement"]]
        span = instrument["high"] - instrument["low"]
        drives = loop["drives"]
        inner = tags.index(drives["loop"]) if isinstance(drives, dict) else -1
        driven = instruments[job["loops"][inner]["measurement"]] if inner >= 0 else actuators[drives]
        at = driven["at"]
        loops.append(
            Loop(
                tag=loop["tag"],
                measurement=measurements.index(loop["measurement"]),
                source=sources.index(drives) if inner < 0 else -1,
                inner=inner,
                outer=driver.get(loop["tag"], -1),
                low=loop.get("outputLow", driven["low"]) - at,
                high=loop.get("outputHigh", driven["high"]) - at,
                rate=driven.get("rateLimit", math.inf) if inner < 0 else math.inf,
                tolerance=loop.get("tolerance", 0.01 * span),
                weight=loop.get("weight", 0.0 if loop["tag"] in driver else 1.0),
                span=span,
                noise=instrument.get("noise", 0.001 * span),
                setpoint_step=loop["setpointStep"],
                load_step=loop.get("loadStep", 0.0),
                settings=settings_of(loop, span, driven["high"] - driven["low"], seconds),
            )
        )

    def depth(i: int) -> int:
        return 0 if loops[i].outer < 0 else 1 + depth(loops[i].outer)

    controller = job["loops"][0]["controller"]
    return Unit(
        scan=controller["scan"] * SECONDS[controller["scanUnit"]] / seconds,
        sources=sources,
        measurements=measurements,
        paths=paths_of(unit, sources, measurements),
        loops=loops,
        order=sorted(range(len(loops)), key=lambda i: (depth(i), i)),
        disturbances=[(sources.index(d["tag"]), d["tag"], d["step"]) for d in unit["disturbances"]],
        upset_weights=job["search"]["upsetWeights"],
    )
