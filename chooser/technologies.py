"""What the technology of a part implies: the names, and what may be assumed of each.

Names are the ones stored in the stock and written in sheets; synonyms are what people write.
"""

from __future__ import annotations

from dataclasses import dataclass

from chooser.parts import Kind, Tolerance


@dataclass(frozen=True, slots=True)
class Technology:
    """What is known of every part of one technology.

    Attributes
    ----------
    name : the stored name. kinds : the kinds of part that come in it.
    synonyms : other spellings, lower case.
    tolerance : assumed where none is printed.
    polarised : True where reverse voltage destroys it.
    ceramic_class : 1, 2 or 3 for ceramics, else 0; class 2 and 3 are not timing capacitors.
    """

    name: str
    kinds: tuple[Kind, ...]
    synonyms: tuple[str, ...]
    tolerance: Tolerance
    polarised: bool = False
    ceramic_class: int = 0
