"""The options that fix everything of a circuit but its timing parts, and the circuits they make."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, TypeVar

import typer

from chooser.cli.composing import Parameter
from chooser.cli.wishes import Options, read_option
from chooser.errors import BadRequestError

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit
    from chooser.circuits.timers import Timer
    from chooser.parts import Tolerance

D = TypeVar("D")

DEFAULT_SUPPLY = "9V"
LEAST_FACTOR, MOST_FACTOR = 0.02, 20.0
"""Of a K = time / (R C): beyond them something else was typed (our limits)."""


def _option(name: str, flag: str, metavar: str, help_text: str, default: str | None) -> Parameter:
    kind: Any = str | None if default is None else str
    annotated = Annotated[
        kind, typer.Option(flag, metavar=metavar, help=help_text, show_default=default is not None)
    ]
    return Parameter(name, annotated, default)


def _file(name: str, flag: str, help_text: str) -> Parameter:
    option = typer.Option(flag, metavar="FILE", help=help_text, show_default=False)
    return Parameter(name, Annotated[Path | None, option])


# With no default of its own, so that 9 V typed is told apart from nothing typed.
SUPPLY = _option(
    "supply", "--supply", "VOLT", f"Supply of the circuit; {DEFAULT_SUPPLY} if not given.", None
)
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

    load = read_option(options, "load", parse_current) if options["load"] else 0.0
    return circuit(*_timer(options), load)


def schmitt(options: Options) -> Circuit:
    """Return the Schmitt oscillator of the options."""
    from chooser.circuits.gates import check_gate_supply, gate_named
    from chooser.circuits.schmitt import schmitt as circuit

    gate = gate_named(options["chip"], options["chip_file"])
    return circuit(gate, _supply(options, gate, check_gate_supply), *_factor(options))


def logic_monostable(options: Options) -> Circuit:
    """Return the logic one-shot of the options."""
    from chooser.circuits.logic_monostable import logic_monostable as circuit
    from chooser.circuits.one_shots import check_one_shot_supply, one_shot_named

    one_shot = one_shot_named(options["chip"], options["chip_file"])
    supply = _supply(options, one_shot, check_one_shot_supply)
    return circuit(one_shot, supply, *_factor(options))


def counter(options: Options) -> Circuit:
    """Return the oscillator and counter of the options."""
    from chooser.circuits.counter import counter as circuit
    from chooser.circuits.counters import check_counter_supply, check_ratio, counter_named

    chip = counter_named(options["chip"], options["chip_file"])
    outputs = None
    if options["ratio"] is not None:
        outputs = (check_ratio(chip, _ratio(options["ratio"])),)
    supply = _supply(options, chip, check_counter_supply)
    return circuit(chip, supply, outputs, whole_period=options["whole_period"])


def delay(options: Options) -> Circuit:
    """Return the RC delay of the options."""
    from chooser.circuits.delay import delay as circuit

    supply = _volt(options, "supply") or _usual_supply()
    return circuit(
        supply, *read_option(options, "threshold", lambda text: _threshold(text, supply))
    )


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

    timer = timer_named(options["timer"], options["timer_file"])
    return timer, _supply(options, timer, check_supply)


def _supply(options: Options, device: D, check: Callable[[D, float], None]) -> float:
    """Return the supply that was asked for, or the default, once it suits the device."""
    supply = _volt(options, "supply")
    if supply is not None:
        check(device, supply)
        return supply
    supply = _usual_supply()
    try:
        check(device, supply)
    except BadRequestError as error:
        told = str(error).removesuffix(".")
        raise BadRequestError(f"{told} ({supply:g} V is the default; say --supply).") from error
    return supply


def _usual_supply() -> float:
    from chooser.quantities import parse_voltage

    return parse_voltage(DEFAULT_SUPPLY)


def _volt(options: Options, name: str) -> float | None:
    from chooser.quantities import parse_voltage

    return None if options[name] is None else read_option(options, name, parse_voltage)


def _factor(options: Options) -> tuple[float | None, Tolerance | None]:
    from chooser.quantities import parse_factor

    if options["factor"] is None:
        return None, None
    factor, error = read_option(options, "factor", parse_factor)
    if not LEAST_FACTOR <= factor <= MOST_FACTOR:
        raise BadRequestError(
            f"--factor: {options['factor']!r} is not believable; K = time / (R C) of these chips "
            f"lies between {LEAST_FACTOR:g} and {MOST_FACTOR:g}, such as 0.83."
        )
    return factor, error


def _ratio(text: str) -> int:
    plain = text.strip().lstrip("/")
    if not plain.isascii() or not plain.isdigit() or len(plain) > 12:  # noqa: PLR2004 - absurd
        raise BadRequestError(
            f"--ratio: {text!r} is no division ratio; write a whole number such as 16384."
        )
    return int(plain)


def _threshold(text: str, supply: float) -> tuple[float, Tolerance]:
    """Read a threshold, and how surely it is known, from one text."""
    from chooser.parts import Tolerance
    from chooser.quantities import format_voltage, parse_percent, parse_tolerance, parse_voltage

    words = text.split()
    error = parse_tolerance(words.pop()) if len(words) > 1 else Tolerance(0.0, 0.0)
    value = " ".join(words)
    if value.endswith("%"):
        return parse_percent(value), error
    volt = parse_voltage(value)
    if volt >= supply:
        raise BadRequestError(
            f"--threshold: {format_voltage(volt)} is not reached from a supply of "
            f"{format_voltage(supply)}; write a voltage below it, or a share such as 50%."
        )
    return volt / supply, error


def _one_of(options: Options, name: str, allowed: tuple[str, ...]) -> None:
    if options[name] not in allowed:
        raise BadRequestError(
            f"--{name} {options[name]}: there is no such choice; write {' or '.join(allowed)}."
        )
