"""What callers hand to the door, as texts of the format or plain numbers, made exact."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping, Set
from datetime import date, time, timedelta
from decimal import Decimal
from difflib import get_close_matches
from fractions import Fraction
from itertools import islice
from math import isfinite
from numbers import Real
from typing import TYPE_CHECKING, Any

from acsolve.circuit import unit
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import GROUND, Band, Netlist, Pair, bindings
from acsolve.circuit.unit import Dimension
from acsolve.circuit.value import Value
from acsolve.codes import Code
from acsolve.errors import AnalysisError, CircuitError, Diagnostic

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from acsolve.analyses.cutoff import CutoffLevel
    from acsolve.analyses.grid import HertzBand
    from acsolve.analyses.magnitude import ReferenceName


_REFERENCES: dict[str, ReferenceName] = {"dc": "dc", "infinity": "infinity", "peak": "peak"}
_LARGEST_DECIBEL = 6_000  # about the whole range of a double
_LINEAR_POINTS = 501  # where an even grid is asked for without a number
_NO_FREQUENCIES = (bytes, bytearray, bool, complex, date, time, timedelta, Mapping, Set)


def pair_of(given: Any, netlist: Netlist) -> Pair:
    """A pair of nodes from a node's name, "a,b", two names or a port's name.

    Raises
    ------
    AnalysisError
        [question.no-pair] it is neither a text nor two texts.
    AcsolveError
        [name.unknown-node] a node does not occur; codes of the text format for the text.
    """
    from acsolve.text import parse_pair

    if isinstance(given, str):
        if given in netlist.node_set() and given not in netlist.ports:
            return given, GROUND  # the usual case, without reading anything
        return parse_pair(given, netlist)
    if not (
        isinstance(given, tuple | list)
        and len(given) == 2
        and all(isinstance(node, str) for node in given)
    ):
        raise refuse(
            "question.no-pair",
            f"{_shown(given)} is no pair of nodes",
            'Name a node, two nodes ("a,b" or a tuple of two) or a port.',
        )
    known = netlist.node_set()
    first, second = (_node(node, known, netlist) for node in given)
    return first, second


def _node(given: str, known: Collection[str], netlist: Netlist) -> str:
    kept = netlist.resolve(given.strip())
    if kept in known:
        return kept
    near = get_close_matches(kept, sorted(known), n=1)
    raise CircuitError(
        Diagnostic(
            code="name.unknown-node",
            message=f"there is no node {given}",
            hint=f"Did you mean {near[0]}?" if near else "Nodes are named in chains.",
        )
    )


def names_of(given: Any, netlist: Netlist) -> frozenset[str]:
    """Names of values that stay symbols: a text with commas, or several names.

    Raises
    ------
    AnalysisError
        [option.value] it is no text and no names; [question.unknown-name] there is no
        such value.
    """
    items = _split(given) if isinstance(given, str) else _texts(given, "names to keep")
    if not items:
        return frozenset()
    known = {name for name, _ in netlist.values()}
    for item in items:
        if item not in known:
            raise _unknown(item, known)
    return frozenset(items)


def _split(text: str) -> list[str]:
    """The names between commas; those of a coupling, k(L1, L2), stay in one piece."""
    found, depth = [""], 0
    for sign in text:
        depth += (sign in "([") - (sign in ")]")
        if sign == "," and depth <= 0:
            found.append("")
        else:
            found[-1] += sign
    return [name.strip() for name in found if name.strip()]


def _texts(given: Any, what: str) -> list[str]:
    items: list[Any]
    items = list(given) if isinstance(given, Iterable) and not isinstance(given, bytes) else [None]
    if not all(isinstance(item, str) for item in items):
        raise refuse("option.value", f"{_shown(given)} are no {what}", "Give texts.")
    return items


def texts_of(given: Any, what: str) -> str | list[str]:
    """A text, or several texts."""
    return given if isinstance(given, str) else _texts(given, what)


def values_of(given: Any, named: Mapping[str, Any]) -> dict[str, Any]:
    """Values by the names that they are for, from a mapping and from keywords."""
    if given is not None and not isinstance(given, Mapping):
        raise refuse(
            "option.value",
            f"{_shown(given)} names no values",
            'Give a mapping from names to values, as {"R1": "2k2"}.',
        )
    found = {**(given or {}), **named}
    for name in found:
        if not isinstance(name, str):
            raise refuse(
                "option.value",
                f"{_shown(name)} is no name",
                'Name a part, an attribute or a quantity by a text, as "R1".',
            )
    return found


def value_for(name: str, given: Any, netlist: Netlist) -> Value:
    """A value for a named part, attribute or quantity, its unit checked.

    Raises
    ------
    AcsolveError
        [question.unknown-name] no such name; codes of the text format for a text that
        does not read or has the wrong unit.
    """
    from acsolve.text import parse_value

    dimension = dimension_of(name, netlist)
    if isinstance(given, str):
        return parse_value(given, dimension=dimension, netlist=netlist, target=name)
    return Value(expression=Number(exact(given)))


def exact(given: Any) -> Fraction:
    """A number as an exact fraction: a float stands for the decimal it prints as.

    Raises
    ------
    AnalysisError
        [option.value] it is no number, or not a finite one.
    """
    kind = getattr(getattr(given, "dtype", None), "kind", "f")
    single = getattr(given, "shape", ()) == ()
    if isinstance(given, str | bytes | bool | complex) or kind not in "iuf" or not single:
        raise _no_number(given)
    if isinstance(given, int | Fraction):
        return Fraction(given)
    try:
        if isinstance(given, Decimal):
            return Fraction(given)
        if kind in "iu":
            return Fraction(int(given))
        return Fraction(repr(float(given)))
    except (TypeError, ValueError, OverflowError):
        raise _no_number(given) from None


def _no_number(given: Any) -> AnalysisError:
    return refuse(
        "option.value",
        f"{_shown(given)} is not a finite number",
        "Give a number, as 4700 or 10e-9.",
    )


def dimension_of(name: str, netlist: Netlist) -> Dimension | None:
    """The dimension of a named value; None where another attribute decides it."""
    quantity = netlist.quantities.get(name)
    if quantity is not None:
        return quantity.dimension
    known = list(netlist.quantities)
    for part in netlist.parts:
        for attribute in part.definition.attributes:
            full = part.value_name(attribute.name)
            if full == name:
                return attribute.dimension
            known.append(full)
    for coupling in netlist.couplings:
        if coupling.name == name:
            return unit.NONE
        known.append(coupling.name)
    raise _unknown(name, known)


def _unknown(name: str, known: Iterable[str]) -> AnalysisError:
    names = sorted(known)
    near = [item for item in names if item.casefold() == name.casefold()]
    near = near or get_close_matches(name, names, n=1)
    hint = "Name a part, an attribute or a quantity."
    if near:
        hint = f"Did you mean {near[0]}?"
    elif 0 < len(names) <= _NAMES_SHOWN:
        hint = f"There are {', '.join(names)}."
    return refuse("question.unknown-name", f"there is nothing named {name} in this circuit", hint)


_NAMES_SHOWN = 12  # names that a hint lists


def level_of(given: Any) -> CutoffLevel:
    """A level in decibels relative to the reference; None and -3 dB are half power.

    Raises
    ------
    AnalysisError
        [option.value] it is no number, or beyond the range of numbers.
    """
    from acsolve.analyses.cutoff import CutoffLevel, cutoff_level
    from acsolve.text import parse_level

    if given is None:
        return CutoffLevel()
    if not isinstance(given, str):
        return cutoff_level(_within_range(exact(given)))
    decibel = parse_level(given).decibel
    return (
        CutoffLevel() if decibel is None else cutoff_level(_within_range(_number(decibel, given)))
    )


def _within_range(decibel: Fraction) -> Fraction:
    if abs(decibel) > _LARGEST_DECIBEL:
        raise refuse(
            "option.value",
            f"the level is beyond {_LARGEST_DECIBEL} dB",
            "Give a level in decibels, as -6.",
        )
    return decibel


def reference_of(given: Any) -> ReferenceName | Fraction | None:
    """`dc`, `infinity`, `peak`, a stated gain, or None to choose by the shape.

    Raises
    ------
    AnalysisError
        [question.no-reference] the gain is not above zero; [option.value] it is no number.
    """
    from acsolve.text import parse_gain

    if given is None:
        return None
    if isinstance(given, str):
        word = given.strip()
        if word in _REFERENCES:
            return _REFERENCES[word]
        if word.isalpha():
            raise refuse(
                "option.value",
                f"{_shown(word)} is no reference",
                "References are dc, infinity, peak, and a gain such as 0.5.",
            )
        gain = _number(parse_gain(given), given)
    else:
        gain = exact(given)
    if gain <= 0:
        raise refuse(
            "question.no-reference",
            f"a gain to count from is above zero, got {_shown(given)}",
            "Give its magnitude, or one of dc, infinity and peak.",
        )
    return gain


def share_of(given: Any) -> float:
    """A share, 0.01 for 1 %, from a number or a text ("1%")."""
    if not isinstance(given, str):
        return _as_float(exact(given))
    number, percent, rest = given.strip().partition("%")
    try:
        found = float(number) / (100 if percent else 1)
    except ValueError:
        found = -1.0
    if rest or not 0 < found < 1:
        raise refuse(
            "option.value", f"{_shown(given)} is no share between 0 and 100 %", "Write, say, 1%."
        )
    return found


def frequencies_of(
    given: Any, netlist: Netlist, *, points: Any = None, linear: bool = False
) -> NDArray[np.float64]:
    """Frequencies in hertz from a text of the format or from numbers, their shape kept.

    Raises
    ------
    AnalysisError
        [sweep.band] they are no finite frequencies from 0 Hz upwards; [sweep.points] the
        number of points is not sensible, or given for frequencies that are named.
    TextError
        codes of the text format for a text that does not read.
    """
    if isinstance(given, str) and ".." in given:
        return _grid(band_of(given, netlist), points, linear=linear)
    if points is not None or linear:
        raise refuse(
            "sweep.points",
            "the frequencies are named one by one, so a number of points and even steps "
            "do not go with them",
            'Give a band, as "10 Hz .. 1 MHz", or leave them out.',
        )
    if isinstance(given, str):
        from acsolve.analyses.grid import explicit
        from acsolve.text import parse_frequencies

        found = parse_frequencies(given, netlist=netlist)
        return explicit([number_of(value, netlist) for value in found])
    return _numbers(given)


def _numbers(given: Any) -> NDArray[np.float64]:
    """Numbers of any shape as frequencies."""
    import numpy as np

    from acsolve.analyses.grid import MOST_POINTS

    if given is None or isinstance(given, (*_NO_FREQUENCIES, np.ma.MaskedArray)):
        raise _no_frequencies(given)
    if isinstance(given, Iterator):
        given = list(islice(given, MOST_POINTS + 1))
        if len(given) > MOST_POINTS:
            raise refuse(
                "sweep.points",
                f"there are more than {MOST_POINTS:,} frequencies",
                "Ask for fewer points.",
            )
    try:
        raw = np.asarray(given)
        if raw.dtype.kind == "O" and not all(map(_is_real, raw.ravel().tolist())):
            raise _no_frequencies(given)
        if raw.dtype.kind not in "iufO" or _holds_bool(given):
            raise _no_frequencies(given)
        found = np.array(raw, dtype=np.float64)
    except (TypeError, ValueError, OverflowError) as stop:
        if isinstance(stop, AnalysisError):
            raise
        raise _no_frequencies(given) from None
    if not np.all(np.isfinite(found) & (found >= 0)):
        raise refuse(
            "sweep.band",
            "a frequency is negative or not finite",
            "Give frequencies in hertz from 0 upwards.",
        )
    return found


def _is_real(item: Any) -> bool:
    return isinstance(item, Real | Decimal) and not isinstance(item, bool)


def _holds_bool(given: Any) -> bool:
    if isinstance(given, list | tuple):
        return any(map(_holds_bool, given))
    return isinstance(given, bool)


def _no_frequencies(given: Any) -> AnalysisError:
    return refuse(
        "sweep.band",
        f"{_shown(given)} are no frequencies",
        'Give numbers in hertz, or a text as "10 Hz .. 1 MHz" or "50 Hz, 60 Hz".',
    )


def band_of(given: Any, netlist: Netlist) -> HertzBand:
    """The edges of a band from a text ("10 Hz .. 1 MHz") or two numbers in hertz, exact.

    Raises
    ------
    AnalysisError
        [sweep.band] it is no band, or does not go from a lower to a higher frequency.
    TextError
        codes of the text format for a text that does not read.
    """
    from acsolve.analyses.grid import HertzBand
    from acsolve.text import parse_band

    if isinstance(given, HertzBand):
        return given
    if isinstance(given, str):
        band = parse_band(given, netlist=netlist)
        return HertzBand(number_of(band.low, netlist), number_of(band.high, netlist))
    if not (isinstance(given, tuple | list) and len(given) == 2):
        raise _no_band(given)
    try:
        low, high = exact(given[0]), exact(given[1])
    except AnalysisError:
        raise _no_band(given) from None
    if not (0 <= low < high and isfinite(_as_float(high))):
        raise _no_band(given)
    return HertzBand(low, high)


def _no_band(given: Any) -> AnalysisError:
    return refuse(
        "sweep.band",
        f"{_shown(given)} is no band from a lower to a higher frequency",
        'Give a text, as "10 Hz .. 1 MHz", or two numbers in hertz.',
    )


def edges_of(band: Band, netlist: Netlist) -> tuple[float, float]:
    """The edges of a file's band in hertz."""
    return float(number_of(band.low, netlist)), float(number_of(band.high, netlist))


def number_of(value: Value, netlist: Netlist) -> Fraction:
    """A value of a circuit as a number: exact where it is stated as one."""
    from acsolve.equations.evaluate import Evaluator, FloatArithmetic

    assert value.expression is not None, "a question states its numbers"
    if isinstance(value.expression, Number):
        return value.expression.value
    evaluate = Evaluator(bindings(netlist), FloatArithmetic())
    return Fraction(float(evaluate(value.expression)))


def _grid(band: HertzBand, points: Any, *, linear: bool) -> NDArray[np.float64]:
    """A grid over a band; points are a number, or a text such as "50/decade"."""
    from acsolve.analyses import grid

    text = str(points).replace(" ", "") if points is not None else ""
    count, sign, word = text.partition("/")
    wrong = points is not None and not (count.isdecimal() and count.isascii() and len(count) < 9)
    if wrong or (sign and (word != "decade" or linear)):
        raise refuse(
            "sweep.points",
            f"{_shown(points)} is no number of points" + (" of an even grid" * linear),
            "Write 200 for so many in all"
            + (". " if linear else ", or 50/decade for so many in each decade. ")
            + "Only a sweep takes auto.",
        )
    if linear:
        return grid.linear(band, points=int(count or _LINEAR_POINTS))
    if sign:
        return grid.logarithmic(band, per_decade=int(count))
    return grid.logarithmic(band, points=int(count) if count else None)


def _as_float(value: Fraction) -> float:
    try:
        return float(value)
    except OverflowError:
        return float("inf")


def _shown(given: Any) -> str:
    """What was given, short enough for a message."""
    if isinstance(given, int) and not isinstance(given, bool) and abs(given) >= 10**60:
        return "a very large number"
    text = given if isinstance(given, str) else " ".join(repr(given).split())
    return text if len(text) <= 60 else f"{text[:57]}…"


def _number(value: Value, given: str) -> Fraction:
    if isinstance(value.expression, Number):
        return value.expression.value
    raise refuse("option.value", f"{given} is not a plain number", "Write a number, as 0.5.")


def refuse(code: Code, message: str, hint: str) -> AnalysisError:
    """An error of one sentence and its remedy."""
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
