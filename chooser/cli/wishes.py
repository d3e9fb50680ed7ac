"""What is wanted of a circuit: from the words of a command to targets."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any, TypeVar

from chooser.errors import BadRequestError, UnreadableValueError

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit
    from chooser.search.request import Target

Options = Mapping[str, Any]
V = TypeVar("V")

BELOW_HALF = (
    "steer the charging with a diode (`fit steered`), or hang the load between output "
    "and supply, so that it is on in the low time (--on, --off, --active low)"
)


FASTEST = 1e-6
"""Second; common practice, no source: below it the delays of all the chips here rule."""


def read_option(options: Options, name: str, parse: Callable[[str], V]) -> V:
    """Read the value of an option.

    Raises
    ------
    BadRequestError
        It is no such value; the sentence names the option.
    """
    try:
        return parse(options[name])
    except UnreadableValueError as error:
        raise BadRequestError(f"{_flag(options, name)}: {error}") from error


def _flag(options: Options, name: str) -> str:
    """Return how an option is typed; what a fit is of is typed without."""
    return "TARGET" if name == "target" and options["fits"] else f"--{name}"


def _one(
    options: Options, name: str, parse: Callable[[str], float], what: str, example: str
) -> float:
    """Read the one value that is wanted; a range of them is told apart from what is no value."""
    from chooser.quantities import is_range

    text = options[name]
    if is_range(text):
        raise BadRequestError(
            f"{_flag(options, name)}: {text!r} is a range; name the one {what} that is wanted, "
            f"such as {example}."
        )
    return read_option(options, name, parse)


def interval_targets(options: Options, circuit: Circuit) -> tuple[Target, ...]:
    """Return the one interval that is wanted; none where nothing was said (of a check)."""
    from chooser.quantities import format_duration, parse_duration
    from chooser.search.request import Target

    if options["target"] is None:
        return ()
    wanted = _one(options, "target", parse_duration, "interval", "30s")
    if options["fits"] and wanted < circuit.shortest:
        said = f"make {format_duration(wanted)}"
        raise _too_fast(circuit, wanted, said, "a logic one-shot (`fit logic-monostable`)")
    return (Target("interval", wanted, wanted),)


def _too_fast(circuit: Circuit, wanted: float, what: str, instead: str) -> BadRequestError:
    """Say why a circuit cannot be so fast, and what can."""
    from chooser.cautions import SMALL_CURRENT
    from chooser.quantities import format_duration

    if wanted < FASTEST:
        return BadRequestError(
            f"The {circuit.device} cannot {what}: below about {format_duration(FASTEST)} that is "
            "too fast for any RC circuit of these chips; take fast gates, or a crystal."
        )
    timer = circuit.timer
    bipolar = timer is not None and timer.threshold_current_limit > SMALL_CURRENT
    return BadRequestError(
        f"The {circuit.device} cannot {what}: its own delays rule below "
        f"{format_duration(circuit.shortest, digits=3)}; take "
        f"{'a faster one (--timer cmos), or ' if bipolar else ''}{instead}."
    )


def value_targets(output: str) -> Callable[[Options, Circuit], tuple[Target, ...]]:
    """Return how the value of a plain network is read."""

    def targets(options: Options, _circuit: Circuit) -> tuple[Target, ...]:
        from chooser.quantities import parse_capacitance, parse_resistance
        from chooser.search.request import Target

        if options["target"] is None:
            return ()
        plain = output == "resistance"
        parse, example = (parse_resistance, "14k25") if plain else (parse_capacitance, "320n")
        wanted = _one(options, "target", parse, output, example)
        return (Target(output, wanted, wanted),)

    return targets


def period_targets(options: Options, circuit: Circuit) -> tuple[Target, ...]:
    """Return the period of an oscillator whose duty is what it is."""
    period = _period(options, circuit)
    if period is None and options["fits"]:
        raise BadRequestError("Say what is wanted: --frequency 440Hz or --period 2ms.")
    return () if period is None else (period,)


def high_low_targets(options: Options, circuit: Circuit) -> tuple[Target, ...]:
    """Return what is wanted of an oscillator whose two times can be chosen.

    Raises
    ------
    BadRequestError
        Nothing, too much or half of it was said, or what the circuit cannot do.
    """
    pairs = [
        name
        for name, given in (
            ("--high and --low", _any(options, "high", "low")),
            ("--on and --off", _any(options, "on", "off")),
            ("--frequency or --period", _any(options, "frequency", "period", "duty")),
        )
        if given
    ]
    if len(pairs) > 1:
        raise BadRequestError(f"Say it one way only: {' or '.join(pairs)}.")
    if not pairs:
        if not options["fits"]:
            return ()
        raise BadRequestError(
            "Say what is wanted: --high 2s --low 1s, or --frequency 440Hz --duty 50..60%, or "
            "--on 1s --off 3s."
        )
    if _any(options, "frequency", "period", "duty"):
        targets = _period_and_duty(options, circuit)
    else:
        targets = _two_times(options)
    if options["fits"]:
        _check_possible(targets, circuit)
    return targets


def _any(options: Options, *names: str) -> bool:
    return any(options[name] is not None for name in names)


def _two_times(options: Options) -> tuple[Target, ...]:
    from chooser.quantities import parse_duration
    from chooser.search.request import Target

    by_level = _any(options, "high", "low")
    first, second = ("high", "low") if by_level else ("on", "off")
    for one, other in ((first, second), (second, first)):
        if options[one] is None:
            raise BadRequestError(
                f"--{other} alone does not say how long the {one} time is; add --{one}."
            )
    names = [first, second]
    if not by_level and options["active"] == "low":
        names.reverse()
    found = []
    for level, name in zip(("high", "low"), names, strict=True):
        time = _one(options, name, parse_duration, "time", "2s")
        found.append(Target(level, time, time, called="" if by_level else name))
    return tuple(found)


def _period(options: Options, circuit: Circuit) -> Target | None:
    """Return the target that a frequency or a period makes; a frequency ranks as its period."""
    from chooser.quantities import (
        format_duration,
        format_frequency,
        parse_duration,
        parse_frequency,
    )
    from chooser.search.request import Target

    if options["frequency"] is not None and options["period"] is not None:
        raise BadRequestError("--frequency and --period say the same; leave one out.")
    if options["frequency"] is not None:
        hertz = _one(options, "frequency", parse_frequency, "frequency", "440Hz")
        target, said = Target("period", 1.0 / hertz, 1.0 / hertz, hertz), format_frequency(hertz)
    elif options["period"] is not None:
        period = _one(options, "period", parse_duration, "period", "2ms")
        target = Target("period", period, period)
        said = f"a period of {format_duration(period)}"
    else:
        return None
    if options["fits"] and target.low < circuit.shortest:
        what = f"oscillate {'with' if target.frequency is None else 'at'} {said}"
        raise _too_fast(circuit, target.low, what, "a Schmitt inverter (`fit schmitt`)")
    return target


def _period_and_duty(options: Options, circuit: Circuit) -> tuple[Target, ...]:
    from chooser.search.request import ANY_DUTY, Target

    period = _period(options, circuit)
    if options["duty"] is not None:
        duty = Target("duty", *read_option(options, "duty", _duty))
        if period is not None:
            return (period, duty)
        if not options["fits"]:
            return (duty,)
    if period is None:
        raise BadRequestError("--duty alone does not say how fast; add --frequency or --period.")
    # Any duty will do that the circuit can have.
    return (period,) if not options["fits"] else (period, Target("duty", ANY_DUTY, 1 - ANY_DUTY))


def _duty(text: str) -> tuple[float, float]:
    from chooser.quantities import is_range, parse_percent, parse_percent_range

    if is_range(text):
        span = parse_percent_range(text)
        low, high = span.low, span.high
    else:
        low = high = parse_percent(text)
    if not 0.0 < low <= high < 1.0:
        raise BadRequestError(
            f"A duty of {text} is no oscillation; write one between 0% and 100%, such as 60%."
        )
    return low, high


def _check_possible(targets: tuple[Target, ...], circuit: Circuit) -> None:
    """Refuse what a circuit that charges through both resistors cannot do."""
    from chooser.quantities import format_percent

    wanted = {target.output: target for target in targets}
    most = (
        wanted["duty"].high
        if "duty" in wanted
        else wanted["high"].low / (wanted["high"].low + wanted["low"].low)
    )
    if most > circuit.twin.least_duty:
        return
    if abs(most - 0.5) < 1e-3:  # noqa: PLR2004 - a half, as people round it
        raise BadRequestError(
            "A duty of 50% would need RA = 0, which shorts the supply through the discharge pin; "
            f"take the output-fed circuit (`fit output-fed`), or {BELOW_HALF}."
        )
    raise BadRequestError(
        "A plain astable is high for more than half of its period, and "
        f"{format_percent(most, digits=3)} was asked; {BELOW_HALF}."
    )
