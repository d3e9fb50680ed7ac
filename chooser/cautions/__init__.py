"""What to look out for before building a fit: stable codes, each with one sentence of advice.

`rules.py` has the rules in order; they stand in `of_parts.py` (what was picked), `of_circuits.py`
(what the circuit makes of it), `of_devices.py` (what the device leaves open), `of_discharge.py`
(what the discharge pin of a timer has to carry) and `of_surroundings.py` (what hangs on the
circuit).
"""

from chooser.cautions.of_circuits import SMALL_CURRENT
from chooser.cautions.of_parts import needed_rating
from chooser.cautions.of_surroundings import METER_OHM, STANDING
from chooser.cautions.record import Caution, Code, FitFacts
from chooser.cautions.rules import cautions_of

__all__ = [
    "METER_OHM",
    "SMALL_CURRENT",
    "STANDING",
    "Caution",
    "Code",
    "FitFacts",
    "cautions_of",
    "needed_rating",
]
