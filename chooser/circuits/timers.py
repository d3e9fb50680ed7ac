"""The figures of the timers, read from one table; a user's file of the same form adds types."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import inf
from pathlib import Path
from typing import Any

from chooser.circuits.figure_values import Flag, Number
from chooser.circuits.figures import Catalogue, check_order
from chooser.errors import BadRequestError


@dataclass(frozen=True, slots=True)
class Timer:
    """What the data sheet of one timer says; typical figures beside their limits.

    Attributes
    ----------
    name : type number. title : what it is, in words.
    supply_min, supply_max : supply voltage in volt.
    threshold : trip point as a fraction of the supply.
    trigger : fraction of the supply at which an astable turns; half the threshold if missing.
    threshold_current_typical, threshold_current_limit : into the threshold input, ampere.
    discharge_leakage_typical, discharge_leakage_limit : into the discharge pin while off, ampere.
    discharge_resistance_typical, discharge_resistance_limit : of the discharge switch, ohm.
    discharge_current_limit : largest current the switch is specified for, ampere.
    timing_error_typical, timing_error_limit : of the timer alone, fractions of the interval.
    astable_error_typical, astable_error_limit : the same as an astable, fractions of the period.
    temperature_drift_typical, temperature_drift_limit : of the interval, either way, 1/K.
    astable_temperature_drift_typical, astable_temperature_drift_limit : of the period, 1/K.
    supply_drift_typical, supply_drift_limit : of the interval, either way, 1/V.
    astable_supply_drift_typical, astable_supply_drift_limit : of the period, 1/V.
    shortest_interval : in second; below it the timer's own delays rule.
    highest_frequency : as an astable, hertz; above it the timer's own delays rule.
    output_high_drop_typical, output_high_drop_limit : high output, hardly loaded, below the
        supply in volt. output_high_resistance : further drop per ampere drawn from it, ohm.
    output_low_typical, output_low_limit : low output, hardly loaded, above ground in volt.
    output_low_resistance : further rise per ampere that it sinks, ohm.
    sink_current_limit, source_current_limit : into the low, out of the high output, ampere.
    ideal : True for the textbook formula.
    sources : (figure, where it is from) pairs; not part of equality.

    Notes
    -----
    A user's type without a model may leave out the figures that the monostable does not need.
    It then has a trigger at half its threshold, the errors and drifts of its monostable as an
    astable, a period of its shortest interval as its highest frequency, and for the rest what
    ``bipolar`` has (``ideal`` if it is ideal).
    """

    name: str
    title: str
    supply_min: float
    supply_max: float
    threshold: float
    trigger: float
    threshold_current_typical: float
    threshold_current_limit: float
    discharge_leakage_typical: float
    discharge_leakage_limit: float
    discharge_resistance_typical: float
    discharge_resistance_limit: float
    discharge_current_limit: float
    timing_error_typical: float
    timing_error_limit: float
    astable_error_typical: float
    astable_error_limit: float
    temperature_drift_typical: float
    temperature_drift_limit: float
    astable_temperature_drift_typical: float
    astable_temperature_drift_limit: float
    supply_drift_typical: float
    supply_drift_limit: float
    astable_supply_drift_typical: float
    astable_supply_drift_limit: float
    shortest_interval: float
    highest_frequency: float
    output_high_drop_typical: float
    output_high_drop_limit: float
    output_high_resistance: float
    output_low_typical: float
    output_low_limit: float
    output_low_resistance: float
    sink_current_limit: float
    source_current_limit: float
    ideal: bool = False
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)


def timer_named(name: str, file: Path | None = None) -> Timer:
    """Return the timer of a name, in any mixture of upper and lower case.

    Parameters
    ----------
    name : a type number, or ideal, bipolar or cmos.
    file : a file of the form of timers.toml with more types, or None.

    Raises
    ------
    UnknownNameError
        No such timer; the sentence names the nearest and all known ones.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    return TIMERS.named(name, file)


def timer_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all timers, those of the file last (errors as in `timer_named`)."""
    return tuple(TIMERS.known(file))


def check_supply(timer: Timer, supply: float) -> None:
    """Refuse a supply voltage (volt) that the timer does not work at.

    Raises
    ------
    BadRequestError
        Outside the timer's supply range, or not above zero.
    """
    TIMERS.check_supply(timer, supply)


def _half(_key: str, values: Mapping[str, Any]) -> tuple[float, str]:
    """Return half the threshold, as the timer's own divider makes it."""
    return values["threshold"] / 2.0, "default: half of threshold"


def _as_monostable(key: str, values: Mapping[str, Any]) -> tuple[float, str]:
    """Return the monostable's figure for one of the astable."""
    other = key.replace("astable_error", "timing_error").removeprefix("astable_")
    return values[other], f"default: as {other}"


def _inverse(_key: str, values: Mapping[str, Any]) -> tuple[float, str]:
    """Return the frequency whose period is the shortest interval."""
    shortest = values["shortest_interval"]
    return (1.0 / shortest if shortest else inf), "default: a period of shortest_interval"


def _as_poorest(key: str, values: Mapping[str, Any]) -> tuple[float, str]:
    """Return the figure of the poorest timer, or of the ideal one."""
    model = TIMERS.built_in["ideal" if values.get("ideal") else "bipolar"]
    return getattr(model, key), f"default: as {model.name}"


def _pair(stem: str, rule: Number) -> dict[str, Number]:
    """Return the two keys of a figure that has a typical value and a limit."""
    return {f"{stem}_typical": rule, f"{stem}_limit": rule}


_FRACTION = Number(above_zero=True, below_one=True)
_LARGEST = Number(above_zero=True, may_be_endless=True)
_NUMBERS: dict[str, Number] = {
    "supply_min": Number(),
    "supply_max": _LARGEST,
    "threshold": _FRACTION,
    "trigger": Number(above_zero=True, below_one=True, default=_half),
    **_pair("threshold_current", Number()),
    **_pair("discharge_leakage", Number()),
    **_pair("discharge_resistance", Number()),
    "discharge_current_limit": _LARGEST,
    **_pair("timing_error", Number(below_one=True)),
    **_pair("astable_error", Number(below_one=True, default=_as_monostable)),
    **_pair("temperature_drift", Number(below_one=True, default=_as_poorest)),
    **_pair("astable_temperature_drift", Number(below_one=True, default=_as_monostable)),
    **_pair("supply_drift", Number(below_one=True, default=_as_poorest)),
    **_pair("astable_supply_drift", Number(below_one=True, default=_as_monostable)),
    "shortest_interval": Number(),
    "highest_frequency": Number(above_zero=True, may_be_endless=True, default=_inverse),
    **_pair("output_high_drop", Number(default=_as_poorest)),
    "output_high_resistance": Number(default=_as_poorest),
    **_pair("output_low", Number(default=_as_poorest)),
    "output_low_resistance": Number(default=_as_poorest),
    "sink_current_limit": Number(above_zero=True, may_be_endless=True, default=_as_poorest),
    "source_current_limit": Number(above_zero=True, may_be_endless=True, default=_as_poorest),
}

FIGURES = tuple(_NUMBERS)
"""Keys of a type that hold a number, in the order of the record."""

_PAIRS = tuple(
    (key, key.removesuffix("typical") + "limit") for key in FIGURES if key.endswith("typical")
)
_LOSSES = (*(key for pair in _PAIRS for key in pair), *(k for k in FIGURES if "resistance" in k))


def _check(timer: Timer, place: str) -> None:
    """Refuse figures that contradict each other."""
    check_order(timer, (("supply_min", "supply_max"), *_PAIRS), place)
    if timer.trigger >= timer.threshold:
        raise BadRequestError(
            f"{place}: trigger ({timer.trigger:g}) is not below threshold "
            f"({timer.threshold:g}); correct one of them."
        )
    if timer.ideal and any(getattr(timer, key) > 0.0 for key in _LOSSES):
        raise BadRequestError(
            f"{place}: an ideal timer has no currents, no resistance and no error; "
            "add ideal = false or take those figures out."
        )


TIMERS = Catalogue(
    record=Timer,
    noun="timer",
    file="timers.toml",
    model="cmos",
    keys={**_NUMBERS, "ideal": Flag()},
    check=_check,
)
"""The timers, from timers.toml."""
