"""The options that fix everything of a circuit but its timing parts, and the circuits they make."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from chooser.cli.composing import Parameter
from chooser.cli.wishes import Options
from chooser.errors import BadRequestError

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit
    from chooser.circuits.timers import Timer
    from chooser.parts import Tolerance


def _option(name: str, flag: str, metavar: str, help_text: str, default: str | None) -> Parameter:
    kind: Any = str | None if default is None else str
    annotated = Annotated[
        kind, typer.Option(flag, metavar=metavar, help=help_text, show_default=default is not None)
    ]
    return Parameter(name, annotated, default)


def _file(name: str, flag: str, help_text: str) -> Parameter:
    option = typer.Option(flag, metavar="FILE", help=help_text, show_default=False)
    return Parameter(name, Annotated[Path | None, option])


SUPPLY = _option("supply", "--supply", "VOLT", "Supply of the circuit.", "9V")
RATING = _option(
    "supply", "--supply", "VOLT", "Voltage that the capacitors must be rated for.", None
)
TIMER = (
    SUPPLY,
    _option(
        "timer",
        "--timer",
        "ideal|bipolar|cmos|TYPE",
        "The timer: a generic one, a type number such as NE555 or TLC555, or ideal, which is the "
        "textbook formula and nothing else.",
        "bipolar",
    ),
    _file("timer_file", "--timer-file", "A TOML file with timer types of your own."),
)
CONTROL = _option(
    "control", "--control", "VOLT", "Voltage forced on the control pin: the trip point.", None
)
DIODE = _option(
    "diode",
    "--diode",
    "silicon|schottky|VOLT",
    "The steering diode, or a constant drop such as 0.6V; silicon unless the timer is ideal.",
    None,
)
PATHS = _option("paths", "--paths", "one|both", "A diode past RB alone, or in both paths.", "one")
LOAD = _option(
    "load", "--load", "AMPERE", "Current from the high output into what hangs on it.", None
)
GATE = _option("chip", "--chip", "TYPE", "The Schmitt inverter, such as 74HC14.", "CD40106")
ONE_SHOT = _option(
    "chip", "--chip", "TYPE", "The one-shot chip; where makers differ, with its edition.", "CD4538B"
)
COUNTER = _option("chip", "--chip", "TYPE", "The counter chip, by its maker's name.", "HEF4060B")
CHIP_FILE = _file("chip_file", "--chip-file", "A TOML file with chip types of your own.")
FACTOR = _option(
    "factor",
    "--factor",
    "K",
    "K = time / (R C) as measured on your piece, such as 0.83 or '0.83 1%'.",
    None,
)
RATIO = _option(
    "ratio", "--ratio", "N", "Division ratio of the output to use; any if not given.", None
)
WHOLE_PERIOD = Parameter(
    "whole_period",
    Annotated[
        bool,
        typer.Option(
            "--whole-period",
            help="Let the interval be a whole period of the output, not the time from a reset to "
            "its first rise.",
        ),
    ],
    default=False,
)
THRESHOLD = _option(
    "threshold",
    "--threshold",
    "VOLT|PERCENT",
    "Where the input turns, as a voltage or a share of the supply; '2.5V 10%' says how surely.",
    "50%",
)


def _wish(name: str, metavar: str, help_text: str) -> Parameter:
    return _option(name, f"--{name}", metavar, help_text, None)


PERIOD = (
    _wish("frequency", "HERTZ", "Frequency wanted: 440Hz, 1.5kHz. Ranked as its period."),
    _wish("period", "TIME", "Period wanted: 2ms, 10s."),
)
HIGH_LOW = (
    _wish("high", "TIME", "How long the output is to be high."),
    _wish("low", "TIME", "How long the output is to be low."),
    *PERIOD,
    _wish("duty", "PERCENT", "Share of the period in which the output is high: 60%, 50..55%."),
    _wish("on", "TIME", "How long the load is to be on; see --active."),
    _wish("off", "TIME", "How long the load is to be off."),
    _option(
        "active",
        "--active",
        "high|low",
        "The output that switches the load on: low where it hangs between output and supply.",
        "high",
    ),
)


def monostable(options: Options) -> Circuit:
    """Return the one-shot of the options."""
    from chooser.circuits.monostable import monostable as circuit

    return circuit(*_timer(options), _volt(options, "control"))


def astable(options: Options) -> Circuit:
    """Return the astable of the options."""
    from chooser.circuits.astable import astable as circuit

    _one_of(options, "active", ("high", "low"))
    return circuit(*_timer(options), _volt(options, "control"))


def steered(options: Options) -> Circuit:
    """Return the steered astable of the options."""
    from chooser.circuits.diodes import diode_named
    from chooser.circuits.steered import steered as circuit

    _one_of(options, "active", ("high", "low"))
    _one_of(options, "paths", ("one", "both"))
    timer, supply = _timer(options)
    diode = diode_named(options["diode"] or ("ideal" if timer.ideal else "silicon"))
    both = options["paths"] == "both"
    return circuit(timer, supply, diode, both=both, control=_volt(options, "control"))


def output_fed(options: Options) -> Circuit:
    """Return the output-fed astable of the options."""
    from chooser.circuits.output_fed import output_fed as circuit
    from chooser.quantities import parse_current

    load = parse_current(options["load"]) if options["load"] else 0.0
    return circuit(*_timer(options), load)


def schmitt(options: Options) -> Circuit:
    """Return the Schmitt oscillator of the options."""
    from chooser.circuits.gates import gate_named
    from chooser.circuits.schmitt import schmitt as circuit

    gate = gate_named(options["chip"], options["chip_file"])
    return circuit(gate, _supply(options), *_factor(options))


def logic_monostable(options: Options) -> Circuit:
    """Return the logic one-shot of the options."""
    from chooser.circuits.logic_monostable import logic_monostable as circuit
    from chooser.circuits.one_shots import one_shot_named

    one_shot = one_shot_named(options["chip"], options["chip_file"])
    return circuit(one_shot, _supply(options), *_factor(options))


def counter(options: Options) -> Circuit:
    """Return the oscillator and counter of the options."""
    from chooser.circuits.counter import counter as circuit
    from chooser.circuits.counters import check_ratio, counter_named

    chip = counter_named(options["chip"], options["chip_file"])
    outputs = None
    if options["ratio"] is not None:
        outputs = (check_ratio(chip, _ratio(options["ratio"])),)
    return circuit(chip, _supply(options), outputs, whole_period=options["whole_period"])


def delay(options: Options) -> Circuit:
    """Return the RC delay of the options."""
    from chooser.circuits.delay import delay as circuit

    supply = _supply(options)
    return circuit(supply, *_threshold(options["threshold"], supply))


def resistance(_options: Options) -> Circuit:
    """Return the plain resistance."""
    from chooser.circuits.plain import resistance as circuit

    return circuit()


def capacitance(options: Options) -> Circuit:
    """Return the plain capacitance."""
    from chooser.circuits.plain import capacitance as circuit

    return circuit(_volt(options, "supply") or 0.0)


def _timer(options: Options) -> tuple[Timer, float]:
    from chooser.circuits.timers import check_supply, timer_named

    timer, supply = timer_named(options["timer"], options["timer_file"]), _supply(options)
    check_supply(timer, supply)
    return timer, supply


def _supply(options: Options) -> float:
    from chooser.quantities import parse_voltage

    return parse_voltage(options["supply"])


def _volt(options: Options, name: str) -> float | None:
    from chooser.quantities import parse_voltage

    return None if options[name] is None else parse_voltage(options[name])


def _factor(options: Options) -> tuple[float | None, Tolerance | None]:
    from chooser.quantities import parse_factor

    return (None, None) if options["factor"] is None else parse_factor(options["factor"])


def _ratio(text: str) -> int:
    plain = text.strip().lstrip("/")
    if not plain.isascii() or not plain.isdigit() or len(plain) > 12:  # noqa: PLR2004 - absurd
        raise BadRequestError(f"{text!r} is no division ratio; write a whole number such as 16384.")
    return int(plain)


def _threshold(text: str, supply: float) -> tuple[float, Tolerance]:
    """Read a threshold, and how surely it is known, from one text."""
    from chooser.parts import Tolerance
    from chooser.quantities import parse_percent, parse_tolerance, parse_voltage

    words = text.split()
    error = parse_tolerance(words.pop()) if len(words) > 1 else Tolerance(0.0, 0.0)
    value = " ".join(words)
    if value.endswith("%"):
        return parse_percent(value), error
    return parse_voltage(value) / supply, error


def _one_of(options: Options, name: str, allowed: tuple[str, ...]) -> None:
    if options[name] not in allowed:
        raise BadRequestError(
            f"--{name} {options[name]}: there is no such choice; write {' or '.join(allowed)}."
        )
