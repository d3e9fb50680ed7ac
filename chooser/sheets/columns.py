"""The one table of the columns of a stock sheet, and the headings people write for them."""

from __future__ import annotations

import re
from dataclasses import dataclass
from difflib import get_close_matches

from chooser.parts import Kind
from chooser.plausible import TRAIT_KINDS

_EVERY = tuple(Kind)


@dataclass(frozen=True, slots=True)
class Column:
    """One column of a stock sheet.

    Attributes
    ----------
    name : the heading as documented.
    holds : what belongs in it, with an example, for messages and help.
    kinds : the kinds of part it may be filled for.
    needed : True where every row must fill it.
    free_text : True where any text is fine; nothing is read out of it.
    synonyms : other headings for it.
    """

    name: str
    holds: str
    kinds: tuple[Kind, ...] = _EVERY
    needed: bool = False
    free_text: bool = False
    synonyms: tuple[str, ...] = ()


COLUMNS: tuple[Column, ...] = (
    Column(
        "kind",
        "resistor, pot, trimmer or capacitor",
        needed=True,
        synonyms=("type", "category", "component", "what"),
    ),
    Column(
        "value",
        "a value such as 4k7 or 100n, or a kit such as E12 10..1M",
        needed=True,
        synonyms=("nominal", "nominal value", "marking"),
    ),
    Column(
        "count",
        "how many: 20, ~50 or plenty",
        needed=True,
        synonyms=("quantity", "qty", "number", "pieces", "pcs", "stock", "in stock"),
    ),
    Column(
        "drawer",
        "the name of the place, such as A4",
        needed=True,
        free_text=True,
        synonyms=("place", "location", "box", "bin", "bag"),
    ),
    Column("tolerance", "such as 5% or -20/+80%", synonyms=("tol",)),
    Column(
        "technology",
        "such as metal-film, polyester or electrolytic",
        synonyms=("tech", "material", "dielectric", "construction"),
    ),
    Column(
        "power",
        "rated power, such as 0.25W or 1/4W",
        kinds=TRAIT_KINDS["power"],
        synonyms=("watts",),
    ),
    Column(
        "voltage",
        "rated voltage, such as 16V",
        synonyms=("volts", "rated voltage", "voltage rating"),
    ),
    Column(
        "tempco",
        "such as 100ppm",
        synonyms=("tc", "tcr", "temperature coefficient"),
    ),
    Column("measured", "the measured value, such as 9.87k", synonyms=("measured value", "reading")),
    Column(
        "meter",
        "how exact that reading is, such as 0.5%",
        synonyms=("meter accuracy", "accuracy"),
    ),
    Column(
        "leakage",
        "leakage current at rated voltage, such as 3uA",
        kinds=TRAIT_KINDS["leakage"],
        synonyms=("leakage current", "leak"),
    ),
    Column(
        "taper",
        "linear, log or reverse-log",
        kinds=TRAIT_KINDS["taper"],
        synonyms=("law", "curve"),
    ),
    Column("turns", "turns of travel, such as 1 or 25", kinds=TRAIT_KINDS["turns"]),
    Column(
        "end_resistance",
        "resistance left at the stop, such as 2R",
        kinds=TRAIT_KINDS["end_resistance"],
        synonyms=("minimum resistance", "residual resistance"),
    ),
    Column("price", "price of one pack, such as 1.20", synonyms=("cost",)),
    Column("pack", "pieces in a pack, such as 100", synonyms=("pack size",)),
    Column("supplier", "any text", free_text=True, synonyms=("shop", "source")),
    Column(
        "order_code",
        "any text",
        free_text=True,
        synonyms=("order number", "order no", "part number", "code"),
    ),
    Column("note", "any text", free_text=True, synonyms=("notes", "remark", "remarks", "comment")),
)

NEEDED: tuple[Column, ...] = tuple(column for column in COLUMNS if column.needed)


def _key(heading: str) -> str:
    return re.sub(r"[\s_\-.:]+", "", heading.casefold())


_BY_KEY = {
    _key(heading): column for column in COLUMNS for heading in (column.name, *column.synonyms)
}


def column_headed(heading: str) -> Column | None:
    """Find the column a heading means; capitals, spaces, underscores and hyphens do not matter."""
    return _BY_KEY.get(_key(heading))


def nearest_columns(heading: str) -> tuple[Column, ...]:
    """List the columns a mistyped heading may have meant, best first; may be empty."""
    close = get_close_matches(_key(heading[:60]), _BY_KEY, n=2, cutoff=0.6)
    return tuple(dict.fromkeys(_BY_KEY[key] for key in close))
