"""The rules in order of importance.

What is dangerous comes first, then what fails in kind, then what is off by much, then what is
worth knowing, so that the first caution of a fit is the one that matters most.
"""

from __future__ import annotations

from chooser.cautions import (
    of_circuits,
    of_devices,
    of_discharge,
    of_parts,
    of_surroundings,
)
from chooser.cautions.record import Caution, Code, FitFacts, Rule

RULES: tuple[tuple[Code, Rule], ...] = (
    (Code.RATING_MARGIN, of_parts.over_voltage),
    (Code.REVERSED_SWING, of_parts.reversed_swing),
    (Code.POLARISED_SERIES, of_parts.polarised_series),
    (Code.DISCHARGE_PIN, of_discharge.discharge_pin),
    (Code.STALL, of_circuits.stall),
    (Code.MAY_NEVER_END, of_circuits.may_never_end),
    (Code.CLASS_2, of_parts.class_2),
    (Code.STRAY, of_parts.stray),
    (Code.SHORT_INTERVAL, of_circuits.short_interval),
    (Code.FREQUENCY_LIMIT, of_circuits.frequency_limit),
    (Code.LEAKAGE, of_circuits.leakage),
    (Code.RATING_MARGIN, of_parts.thin_margin),
    (Code.DEVICE_SCATTER, of_devices.device_scatter),
    (Code.CAPACITOR_TOLERANCE, of_parts.capacitor_tolerance),
    (Code.DIODE_SUPPLY, of_circuits.diode_supply),
    (Code.THRESHOLD_EXACT, of_devices.threshold_exact),
    (Code.ASSUMED_TOLERANCE, of_parts.assumed_tolerance),
    (Code.ASSUMED_KIND, of_parts.assumed_kind),
    (Code.ROUGH_COUNT, of_parts.rough_count),
    (Code.RATING_UNKNOWN, of_parts.rating_unknown),
    (Code.DISCHARGE_SURGE, of_discharge.discharge_surge),
    (Code.RECOVERY, of_discharge.recovery),
    (Code.HIGH_RESISTANCE, of_circuits.high_resistance),
    (Code.STORED_CHARGE, of_parts.stored_charge),
    (Code.POLARITY, of_parts.polarity),
    (Code.METER_ON_NODE, of_surroundings.meter_on_node),
    (Code.TRIGGER_LENGTH, of_surroundings.trigger_length),
)
"""Every rule with its code; what goes for all circuits alike is `of_surroundings.STANDING`."""


def cautions_of(facts: FitFacts) -> tuple[Caution, ...]:
    """Return the cautions of a fit, the most important first; at most one of a rule.

    Parameters
    ----------
    facts : the fit; see `FitFacts` for the units.
    """
    said = ((code, rule(facts)) for code, rule in RULES)
    return tuple(Caution(code, text) for code, text in said if text is not None)
