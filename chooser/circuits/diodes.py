"""The figures of steering diodes, read from one table, or a constant drop as typed.

The drop at a current follows the exponential law, which for a diode is

    Vd = drop + slope ln(I / I_reference),

with slope = n k T / q at room temperature; a slope of 0 is the textbook's constant drop.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from chooser.circuits.figure_values import Number, shown
from chooser.circuits.figures import Catalogue
from chooser.errors import UnknownNameError, UnreadableValueError
from chooser.quantities import format_voltage, parse_voltage


@dataclass(frozen=True, slots=True)
class Diode:
    """Forward drop of one kind of diode.

    Attributes
    ----------
    name : kind, or the drop as typed. title : what it is, in words.
    drop : forward voltage at the reference current, volt.
    reference_current : ampere.
    slope : further volts for a current e times as large; 0 for a constant drop.
    fall_per_kelvin : volt by which the drop falls for one kelvin more.
    sources : (figure, where it is from) pairs; not part of equality.
    """

    name: str
    title: str
    drop: float
    reference_current: float
    slope: float
    fall_per_kelvin: float = 0.0
    sources: tuple[tuple[str, str], ...] = field(default=(), compare=False, repr=False)

    def drop_at(self, current: ArrayLike) -> NDArray[np.float64]:
        """Return the forward voltage (volt) at currents (ampere, >= 0), never below 0.

        Returns
        -------
        Of the shape of ``current``.
        """
        ampere = np.asarray(current, dtype=np.float64)
        if self.slope == 0.0:
            return np.full(ampere.shape, self.drop)
        with np.errstate(divide="ignore"):
            volt = self.drop + self.slope * np.log(ampere / self.reference_current)
        return np.maximum(volt, 0.0)


def diode_named(text: str, file: Path | None = None) -> Diode:
    """Return a diode by its kind, or one of a constant drop such as ``0.6V``.

    Parameters
    ----------
    text : silicon, schottky or ideal in any case, or a voltage.
    file : a file of the form of diodes.toml with more kinds, or None.

    Raises
    ------
    UnknownNameError
        Neither a known kind nor a voltage.
    BadRequestError
        The file cannot be read or a figure in it cannot be; the sentence names file and key.
    """
    try:
        return DIODES.named(text, file)
    except UnknownNameError as unknown:
        try:
            return _constant(parse_voltage(text))
        except UnreadableValueError:
            if not any(letter.isdigit() for letter in text):
                raise unknown from None
            raise UnknownNameError(
                f"{shown(text)} is neither a diode that is known nor a drop; "
                f"write one of {', '.join(diode_names(file))}, or a voltage such as 0.6V."
            ) from None


def diode_names(file: Path | None = None) -> tuple[str, ...]:
    """Return the names of all kinds, those of the file last (errors as in `diode_named`)."""
    return tuple(DIODES.known(file))


def _constant(volt: float) -> Diode:
    """Return a diode with the same drop at any current."""
    name = format_voltage(volt)
    return Diode(
        name=name,
        title=f"a diode with a constant drop of {name}",
        drop=volt,
        reference_current=1e-3,
        slope=0.0,
        fall_per_kelvin=DIODES.built_in["silicon"].fall_per_kelvin if volt else 0.0,
        sources=(
            *((key, "as typed") for key in ("drop", "reference_current", "slope")),
            ("fall_per_kelvin", "as silicon"),
        ),
    )


def _as_silicon(key: str, _values: Mapping[str, Any]) -> tuple[float, str]:
    return getattr(DIODES.built_in["silicon"], key), "default: as silicon"


def _check(_diode: Diode, _place: str) -> None:
    """Let every diode pass: its figures cannot contradict each other."""


DIODES = Catalogue(
    record=Diode,
    noun="diode",
    file="diodes.toml",
    model="silicon",
    keys={
        "drop": Number(),
        "reference_current": Number(above_zero=True),
        "slope": Number(),
        "fall_per_kelvin": Number(default=_as_silicon),
    },
    check=_check,
)
"""The diodes, from diodes.toml."""
