"""Every answer is worked out once more, another way, before anybody sees it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from fractions import Fraction

from chooser.circuits.circuit import outputs_of
from chooser.circuits.leakage import leak_conductance
from chooser.errors import SelfCheckError
from chooser.networks import Join, Leaf, Network, parse_network, write_network
from chooser.parts import Holding
from chooser.search.request import Fit, Request

AGREEMENT = 1e-9
"""Relative difference between the search's floats and fractions that rounding may explain."""


def recheck(fit: Fit, request: Request) -> None:
    """Compare a fit with its own written form, calculated in fractions.

    The networks are written out in decimal, read back, and folded in ohms and farads from the
    bottom up, sharing no number with the search.

    Raises
    ------
    SelfCheckError
        A value, an error or a count does not agree: our fault, and the fit is not shown.
    """
    found: dict[str, Fraction] = {}
    for slot in fit.slots:
        adds = Join.PARALLEL if slot.name == "C" else Join.SERIES
        found[slot.name] = _reread(slot.network, adds, _effective)
        if abs(Fraction(slot.value) / found[slot.name] - 1) > AGREEMENT:
            raise _failed(f"{slot.name} = {slot.value} was to be {float(found[slot.name])}")
    outputs = _outputs(fit, request, found)
    errors = {target.output: target.error(outputs[target.output]) for target in request.targets}
    for output, error in errors.items():
        if not _agree(fit.errors[output], error):
            raise _failed(f"an error of {fit.errors[output]} was to be {error}")
    worst = max(map(abs, errors.values()))
    # The largest error may be either of two of the same size.
    if not any(_agree(fit.error, e) for e in errors.values() if _agree(abs(e), worst)):
        raise _failed(f"a largest error of {fit.error} was to be of size {worst}")
    if fit.in_band != request.accepts(outputs) and not _on_the_edge(outputs, request):
        raise _failed(f"{outputs} was said to be {'in' if fit.in_band else 'out of'} the band")
    _check_counts(fit, request)


def _agree(said: float, found: float) -> bool:
    return abs(said - found) <= AGREEMENT * max(1.0, abs(found))


def _on_the_edge(outputs: dict[str, float], request: Request) -> bool:
    """Tell whether rounding decides if an output is in its band."""
    return any(
        abs(outputs[output] / end - 1) < AGREEMENT
        for output, ends in request.bands.items()
        for end in ends
    )


def _outputs(fit: Fit, request: Request, values: dict[str, Fraction]) -> dict[str, float]:
    """Work the outputs out from slot values, in fractions where the formula allows it."""
    circuit = request.circuit
    ohms = [values[name] for name in circuit.resistors]
    farad = values.get("C", Fraction(1))
    times = circuit.typical.exactly(ohms, farad)
    if times is None:
        leak = 0.0
        if circuit.capacitor and not circuit.lossless:
            leak = float(_reread(fit.slot("C").network, Join.PARALLEL, _leak(circuit.supply)))
        floats = circuit.typical.times([float(ohm) for ohm in ohms], float(farad), leak)
        times = tuple(Fraction(float(time)) for time in floats)
    made = outputs_of(circuit, [Fraction(fit.variant.scale) * time for time in times])
    return {output: float(value) for output, value in made.items()}


def _failed(what: str) -> SelfCheckError:
    return SelfCheckError(
        f"chooser's own check failed: {what}; please report it with the command you gave."
    )


def _effective(holding: Holding) -> float:
    return holding.part.effective


def _leak(supply: float) -> Callable[[Holding], float]:
    return lambda holding: leak_conductance(holding.part, supply).typical


def _reread(network: Network[Holding], adds: Join, of: Callable[[Holding], float]) -> Fraction:
    text = write_network(network, lambda holding: repr(of(holding)).replace("+", ""))
    return _folded(parse_network(text, Fraction), adds)


def _folded(network: Network[Fraction], adds: Join) -> Fraction:
    if isinstance(network, Leaf):
        return network.member
    result, first = Fraction(0), True
    for child in network.children:
        value = _folded(child, adds)
        if first or network.join is adds:
            result += value
        elif result + value:
            result = result * value / (result + value)
        first = False
    return result


def _check_counts(fit: Fit, request: Request) -> None:
    taken = Counter(holding.id for holding in fit.holdings())
    free = {holding.id: holding.free for holding in fit.holdings()}
    for number, count in taken.items():
        there = free[number]
        if there is not None and count * request.boards > there:
            raise _failed(
                f"{count * request.boards} pieces of holding {number} were picked "
                f"and {there} are free"
            )
