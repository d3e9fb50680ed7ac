"""Rules on what the device itself leaves open: its scatter, a threshold taken as exact."""

from __future__ import annotations

from chooser.cautions.record import FitFacts
from chooser.circuits.scattering import SIGMAS
from chooser.quantities import format_percent

WIDE = 0.15
"""Three sigmas of the device alone from which it is worth a word: hardly a timer's own."""

MEASURING = "build it once, measure K = T/(R C), and give it by --factor"

WAYS = {
    "schmitt": MEASURING,
    "logic-monostable": MEASURING,
    "counter": "time a built circuit and change R in proportion",
    "output-fed": "take a CMOS timer or a higher supply, or time a built circuit and change R",
    "delay": "measure the threshold of the piece that is used, and give it by --threshold",
}
"""What to do about it, by family."""

OTHERWISE = "time a built circuit and change R in proportion"


def device_scatter(facts: FitFacts) -> str | None:
    """Speak of devices that differ more from piece to piece than any parts do."""
    chief, circuit = facts.outlook.chief, facts.circuit
    if SIGMAS * chief.device <= WIDE:
        return None
    what = circuit.device or "threshold"
    return (
        f"From piece to piece the {what} alone spreads the {chief.output} by "
        f"{format_percent(chief.device, digits=2)} (one sigma); "
        f"{WAYS.get(circuit.family, OTHERWISE)}."
    )


def threshold_exact(facts: FitFacts) -> str | None:
    """Speak of a threshold that nobody said the limits of."""
    if facts.circuit.family != "delay" or facts.circuit.scatter:
        return None
    return (
        "The threshold is taken as exact, and those of logic inputs differ by tens of percent; "
        "write how sure it is, such as --threshold '50% 20%'."
    )
