"""An oscillator and a ripple counter: long intervals from small, good capacitors.

    T = k Rt Ct for the oscillator; behind n stages the output has a period of 2^n T,
    and after a reset it rises for the first time after 2^(n-1) T.

The constant k is the maker's: 2.2, 2.3 and 2.5 are printed for chips of one number. The theory
of two inverters with a large second resistor gives 2 ln 3: the node of Rt, Ct and the input's
resistor jumps by the supply at each turn and decays through half of it. That theory also says
what a leak across Ct does, to which the published constant is scaled. The capacitor is charged
both ways round, so it must not be a polarised one.
"""

from __future__ import annotations

from math import log

from chooser.circuits.charging import Phase
from chooser.circuits.circuit import Circuit, Companion, Variant, sheet_bounds
from chooser.circuits.counters import Counter, Output, check_counter_supply
from chooser.circuits.laws import Train
from chooser.parts import Tolerance


def counter(
    chip: Counter,
    supply: float,
    outputs: tuple[Output, ...] | None = None,
    *,
    whole_period: bool = False,
) -> Circuit:
    """Return the circuit of a counter.

    Parameters
    ----------
    chip : the counter. supply : in volt.
    outputs : those that may be used; all of the chip's where None.
    whole_period : whether the interval is a whole period of the output, not the time from a
        reset to its first rise.

    Raises
    ------
    BadRequestError
        A supply that the counter does not work at.
    """
    check_counter_supply(chip, supply)
    # Upside down from 1.5 to 0.5 of the supply; the leak pulls towards the other rail.
    half = Phase(1.5 * supply, 2.0 / 3.0, floor=-0.5 * supply)
    law = Train((half,), chip.period_factor / log(3.0))
    variants = tuple(
        Variant(_name(output), float(output.ratio if whole_period else output.first_rise))
        for output in outputs or chip.outputs
    )
    taps = tuple(Variant(_name(output), float(output.first_rise)) for output in chip.outputs)
    fastest = 1.0 / (chip.period_factor * chip.smallest_resistor * chip.highest_frequency)
    return Circuit(
        family="counter",
        title="Oscillator and counter",
        device=chip.name,
        supply=supply,
        resistors=("R",),
        capacitor=True,
        outputs=("interval",),
        typical=law,
        corners=(law,),
        error=Tolerance(chip.rule_minus, chip.rule_plus),
        bounds=sheet_bounds(chip.smallest_resistor, chip.largest_resistor),
        least_farad=max(chip.smallest_capacitor, fastest),
        alternating=True,
        variants=variants,
        taps=taps,
        setting="a whole period of the output" if whole_period else "first rise after a reset",
        companions=(_second_resistor(chip),),
        reset_on_power=True,
    )


def _second_resistor(chip: Counter) -> Companion:
    """Return the resistor between the timing node and the oscillator's input."""
    why = "keeps the oscillator's input from clamping the timing node"
    return Companion("second resistor Rs", chip.series_least, chip.series_most, why)


def _name(output: Output) -> str:
    """Return an output by its stages and, as makers count them differently, its pin."""
    return f"{output.name} (pin {output.pin})" if output.pin else output.name
