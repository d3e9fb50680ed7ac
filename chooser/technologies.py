"""What the technology of a part implies: the names, and what may be assumed of each.

Names are the ones stored in the stock and written in sheets; synonyms are what people write.
Where no tolerance is printed, the assumed one is for resistors and pots the customary one, for
capacitors the widest of the usual ones: a capacitor that prints none promises nothing better.
The figures are usual catalogue values of the trade (common practice, no single source).
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches

from chooser.errors import UnknownNameError
from chooser.parts import Kind, Part, Tolerance


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


_RESISTOR = (Kind.RESISTOR,)
_POT = (Kind.POT, Kind.TRIMMER)
_CAPACITOR = (Kind.CAPACITOR,)


def _both_ways(fraction: float) -> Tolerance:
    return Tolerance(fraction, fraction)


_WIDE = Tolerance(0.2, 0.8)

TECHNOLOGIES: tuple[Technology, ...] = (
    Technology("carbon-film", _RESISTOR, ("cf", "carbon film resistor"), _both_ways(0.05)),
    Technology("metal-film", _RESISTOR, ("mf", "metal film resistor"), _both_ways(0.01)),
    Technology(
        "carbon-composition",
        _RESISTOR,
        ("cc", "carbon comp", "composition", "carbon composite"),
        _both_ways(0.2),
    ),
    Technology("metal-oxide", _RESISTOR, ("mo", "mox", "metal oxide film"), _both_ways(0.05)),
    Technology(
        "wirewound",
        (Kind.RESISTOR, *_POT),
        ("ww", "wire"),
        _both_ways(0.05),
    ),
    Technology("thick-film", _RESISTOR, ("thick",), _both_ways(0.05)),
    Technology("thin-film", _RESISTOR, ("thin",), _both_ways(0.01)),
    Technology("cermet", _POT, ("ceramic metal",), _both_ways(0.1)),
    Technology("carbon", _POT, ("carbon track", "carbon film"), _both_ways(0.2)),
    Technology("conductive-plastic", _POT, ("plastic", "cp"), _both_ways(0.2)),
    Technology(
        "polyester",
        _CAPACITOR,
        ("pet", "mkt", "metallised polyester", "metallized polyester", "polyester film"),
        _both_ways(0.2),
    ),
    Technology(
        "polypropylene",
        _CAPACITOR,
        ("pp", "mkp", "kp", "fkp", "metallised polypropylene", "polypropylene film"),
        _both_ways(0.1),
    ),
    Technology("polystyrene", _CAPACITOR, ("ps", "styrene", "polystyrol"), _both_ways(0.05)),
    Technology("pen", _CAPACITOR, ("polyethylene naphthalate",), _both_ways(0.2)),
    Technology("pps", _CAPACITOR, ("polyphenylene sulphide",), _both_ways(0.2)),
    Technology("mica", _CAPACITOR, ("silver mica", "silvered mica"), _both_ways(0.05)),
    Technology(
        "c0g",
        _CAPACITOR,
        ("cog", "np0", "npo", "ceramic c0g", "ceramic np0", "class 1", "class 1 ceramic"),
        _both_ways(0.1),
        ceramic_class=1,
    ),
    Technology("x7r", _CAPACITOR, ("ceramic x7r",), _both_ways(0.2), ceramic_class=2),
    Technology("x5r", _CAPACITOR, ("ceramic x5r",), _both_ways(0.2), ceramic_class=2),
    Technology("y5v", _CAPACITOR, ("ceramic y5v",), _WIDE, ceramic_class=2),
    Technology("z5u", _CAPACITOR, ("ceramic z5u",), _WIDE, ceramic_class=2),
    # Which ceramic it is was not said: nothing better than class 2 may be hoped for.
    Technology(
        "ceramic",
        _CAPACITOR,
        ("cer", "disc", "ceramic disc", "disc ceramic", "mlcc", "class 2", "multilayer"),
        _WIDE,
        ceramic_class=2,
    ),
    Technology(
        "electrolytic",
        _CAPACITOR,
        ("elko", "elco", "al", "alu", "aluminium", "aluminum", "aluminium electrolytic", "lytic"),
        _both_ways(0.2),
        polarised=True,
    ),
    Technology(
        "electrolytic-low-leakage",
        _CAPACITOR,
        ("low leakage", "low leak", "low leakage electrolytic", "ll", "electrolytic ll"),
        _both_ways(0.2),
        polarised=True,
    ),
    Technology(
        "electrolytic-non-polar",
        _CAPACITOR,
        (
            "non polar",
            "non polar electrolytic",
            "non polarised electrolytic",
            "bipolar",
            "bipolar electrolytic",
            "np",
        ),
        _both_ways(0.2),
    ),
    Technology(
        "tantalum",
        _CAPACITOR,
        ("ta", "tant", "tantal", "tantalum bead", "tantalum electrolytic"),
        _both_ways(0.2),
        polarised=True,
    ),
)

_UNKNOWN = {
    Kind.RESISTOR: _both_ways(0.05),
    Kind.POT: _both_ways(0.2),
    Kind.TRIMMER: _both_ways(0.2),
    Kind.CAPACITOR: _both_ways(0.2),
}


def _key(text: str) -> str:
    """Reduce a spelling to what it has in common with its forms: letters and digits."""
    return re.sub(r"[^0-9a-z]+", "", text.casefold())


def _spellings(technologies: Iterable[Technology]) -> dict[tuple[Kind, str], Technology]:
    table: dict[tuple[Kind, str], Technology] = {}
    for technology in technologies:
        for kind in technology.kinds:
            for spelling in (technology.name, *technology.synonyms):
                table[kind, _key(spelling)] = technology
    return table


_SPELLINGS = _spellings(TECHNOLOGIES)
_BY_NAME = {technology.name: technology for technology in TECHNOLOGIES}


def technology_names(kind: Kind) -> tuple[str, ...]:
    """List the stored names of the technologies that parts of a kind come in."""
    return tuple(technology.name for technology in TECHNOLOGIES if kind in technology.kinds)


def technology_named(text: str, kind: Kind) -> Technology:
    """Find a technology by its name or by what people write for it.

    Parameters
    ----------
    text : a name or synonym; capitals, spaces, hyphens and underscores do not matter.
    kind : the kind of part it is said of: `carbon` is a pot's technology, not a resistor's.

    Raises
    ------
    UnknownNameError
        No part of that kind comes in it; the sentence names the nearest ones, or all.
    """
    found = find_technology(text, kind)
    if found is not None:
        return found
    near = nearest_technologies(text, kind)
    advice = "did you mean " if near else "the known ones are "
    raise UnknownNameError(
        f"{text[:60]!r} is no technology of a {kind.value}; "
        f"{advice}{_either(near or technology_names(kind))}."
    )


def find_technology(text: str, kind: Kind) -> Technology | None:
    """Find a technology as `technology_named` does, None where there is no such one."""
    return _SPELLINGS.get((kind, _key(text)))


def technology_of(part: Part) -> Technology | None:
    """Give what is known of a part's technology, None where the part does not say one."""
    return None if part.technology is None else _BY_NAME.get(part.technology)


LARGE_FARAD = 1e-6
"""Farad from which a capacitor of unknown technology is taken for an electrolytic.

Common practice, no source: loose parts of 1 uF and more are mostly electrolytics, and assuming
the leakier kind, and the one that has a plus, is the side that hurts nobody.
"""


def is_polarised(part: Part) -> bool:
    """Tell whether reverse voltage destroys a capacitor; a large unknown one is taken for such."""
    technology = technology_of(part)
    if technology is not None:
        return technology.polarised
    return part.kind is Kind.CAPACITOR and part.effective >= LARGE_FARAD


def taken_for(part: Part) -> str:
    """Return the technology that a capacitor behaves like: its own, else one by its size.

    A large one of unknown technology is taken for an electrolytic, a small one for a ceramic of
    unknown class.
    """
    technology = technology_of(part)
    if technology is not None:
        return technology.name
    return "electrolytic" if part.effective >= LARGE_FARAD else "ceramic"


def tolerance_of(part: Part) -> tuple[Tolerance, bool]:
    """Give the tolerance to calculate with, and whether it is only assumed.

    A part without a printed tolerance gets the one of its technology; without a technology
    either, 5 % for a resistor and 20 % for pots and capacitors (common practice, no source).
    """
    if part.tolerance is not None:
        return part.tolerance, False
    technology = technology_of(part)
    return (_UNKNOWN[part.kind] if technology is None else technology.tolerance), True


def nearest_technologies(text: str, kind: Kind) -> tuple[str, ...]:
    """List names that hold the text or are held by it, else those spelt nearly so; maybe none."""
    key = _key(text[:60])
    if len(key) > 2:  # noqa: PLR2004 - one or two letters are in too many names
        alike = tuple(
            name for name in technology_names(kind) if key in _key(name) or _key(name) in key
        )
        if alike:
            return alike
    known = {spelling: found for (of, spelling), found in _SPELLINGS.items() if of is kind}
    close = get_close_matches(key, known, n=3, cutoff=0.6)
    return tuple(dict.fromkeys(known[spelling].name for spelling in close))


def _either(names: tuple[str, ...]) -> str:
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} or {names[-1]}"
