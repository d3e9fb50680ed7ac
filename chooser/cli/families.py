"""The circuit families as the command line knows them: a row each, for `fit` and `check` alike."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from chooser.cli import device_options as device
from chooser.cli.composing import Parameter
from chooser.cli.wishes import (
    Options,
    high_low_targets,
    interval_targets,
    period_targets,
    value_targets,
)

if TYPE_CHECKING:
    from chooser.circuits.circuit import Circuit
    from chooser.search.request import Target


@dataclass(frozen=True, slots=True)
class Family:
    """One circuit family.

    Attributes
    ----------
    name : as it is typed. summary : what it is, one sentence for the help.
    slots : names of its slots.
    argument : what TARGET is, or "" where options say what is wanted.
    wishes : the options that say it. device : the options that fix everything but the parts.
    circuit : from options to the circuit. targets : from options and circuit to what is wanted.
    fit, check : an example of either command, after `chooser fit` and `chooser check`.
    """

    name: str
    summary: str
    slots: tuple[str, ...]
    argument: str
    wishes: tuple[Parameter, ...]
    device: tuple[Parameter, ...]
    circuit: Callable[[Options], Circuit]
    targets: Callable[[Options, Circuit], tuple[Target, ...]]
    fit: str
    check: str


INTERVAL = "The interval wanted: 90s, 1.5min, 12ms, 1:30."

FAMILIES: tuple[Family, ...] = (
    Family(
        "monostable",
        "a one-shot: one interval after a trigger, made by one R and one C",
        ("R", "C"),
        INTERVAL,
        (),
        (*device.TIMER, device.CONTROL),
        device.monostable,
        interval_targets,
        "monostable 90s --stock sample_inventory",
        "monostable --R 1M --C '47u electrolytic 25V' --target 62min",
    ),
    Family(
        "astable",
        "an oscillator: charged through RA + RB, discharged through RB",
        ("RA", "RB", "C"),
        "",
        device.HIGH_LOW,
        (*device.TIMER, device.CONTROL),
        device.astable,
        high_low_targets,
        "astable --frequency 440Hz --duty 50..60% --stock sample_inventory",
        "astable --RA 909k --RB 47k --C '470u electrolytic 16V' --supply 5V",
    ),
    Family(
        "steered",
        "an oscillator with a diode past RB, for a duty below a half",
        ("RA", "RB", "C"),
        "",
        device.HIGH_LOW,
        (*device.TIMER, device.CONTROL, device.DIODE, device.PATHS),
        device.steered,
        high_low_targets,
        "steered --on 0.2s --off 1.8s --stock sample_inventory",
        "steered --RA 27k --RB 240k --C 10u --supply 12V",
    ),
    Family(
        "output-fed",
        "an oscillator near 50% duty, R from the output to the timing node",
        ("R", "C"),
        "",
        device.PERIOD,
        (*device.TIMER, device.LOAD),
        device.output_fed,
        period_targets,
        "output-fed --frequency 1kHz --timer cmos --stock sample_inventory",
        "output-fed --R 10k --C 100n --timer TLC555 --supply 5V",
    ),
    Family(
        "schmitt",
        "an oscillator of one Schmitt inverter, R and C",
        ("R", "C"),
        "",
        device.PERIOD,
        (device.SUPPLY, device.GATE, device.CHIP_FILE, device.FACTOR),
        device.schmitt,
        period_targets,
        "schmitt --frequency 1kHz --factor 0.83 --stock sample_inventory",
        "schmitt --R 100k --C 10n --chip 74HC14 --supply 5V",
    ),
    Family(
        "logic-monostable",
        "a one-shot of a logic chip, K R C by type and maker's edition",
        ("R", "C"),
        INTERVAL,
        (),
        (device.SUPPLY, device.ONE_SHOT, device.CHIP_FILE, device.FACTOR),
        device.logic_monostable,
        interval_targets,
        "logic-monostable 5ms --chip HEF4538B --stock sample_inventory",
        "logic-monostable --R 39k --C 3.3u --chip 74121 --supply 5V --target 91ms",
    ),
    Family(
        "counter",
        "long intervals: an oscillator of R and C, divided by a ripple counter",
        ("R", "C"),
        "The interval wanted: 1h, 45min, 2h30min.",
        (),
        (device.SUPPLY, device.COUNTER, device.CHIP_FILE, device.RATIO, device.WHOLE_PERIOD),
        device.counter,
        interval_targets,
        "counter 1h --stock sample_inventory",
        "counter --R 204k --C 10u --chip HEF4060B --ratio 64 --whole-period --target 5min",
    ),
    Family(
        "delay",
        "an RC delay after switching on, until a threshold is reached",
        ("R", "C"),
        "The delay wanted: 200ms, 1s.",
        (),
        (device.SUPPLY, device.THRESHOLD),
        device.delay,
        interval_targets,
        "delay 200ms --supply 5V --threshold 2.5V --stock sample_inventory",
        "delay --R 100k --C '10u tantalum 16V' --supply 5V --threshold 70%",
    ),
    Family(
        "resistance",
        "a resistance and nothing else",
        ("R",),
        "The resistance wanted: 14k25, 4.7M.",
        (),
        (),
        device.resistance,
        value_targets("resistance"),
        "resistance 14k254 --stock sample_inventory",
        "resistance --R '12k 1% + 2k2 5%' --target 14k254",
    ),
    Family(
        "capacitance",
        "a capacitance and nothing else",
        ("C",),
        "The capacitance wanted: 68n, 3u3.",
        (),
        (device.RATING,),
        device.capacitance,
        value_targets("capacitance"),
        "capacitance 320n --stock sample_inventory",
        "capacitance --C '220n 5% || 100n 10%' --target 320n",
    ),
)
"""All families; adding one is a file in `chooser/circuits` and a row here."""
