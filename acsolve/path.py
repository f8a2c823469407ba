"""Questions that are put to a circuit, and the methods that are their answers."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Any, Literal

from acsolve.circuit.netlist import (
    Netlist,
)
from acsolve.errors import Diagnostic, EquationError
from acsolve.given import (
    dimension_of,
    exact,
    level_of,
    names_of,
    reference_of,
    refuse,
    share_of,
    texts_of,
)

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.pole_record import PoleAnswer
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.question import Ask
    from acsolve.analyses.steady import SteadySine
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.analyses.value_for import ValueAnswer
    from acsolve.door import Circuit

PairLike = str | tuple[str, str]
BandLike = str | tuple[float, float]
DriveLike = float | str | tuple[float | str, float | str]
ReferenceLike = Literal["dc", "infinity", "peak"] | float | Fraction | str


@dataclass(frozen=True, slots=True, repr=False)
class Path:
    """A question put to a circuit; its methods are the answers."""

    circuit: Circuit
    ask: Ask

    def __repr__(self) -> str:
        ask = self.ask
        into = f"({ask.target[0]}, {ask.target[1]})"
        if ask.quantity == "impedance":
            return f"Path(impedance into {into})"
        to = into if ask.ammeter is None else ask.ammeter
        if ask.source is None:
            return f"Path({ask.quantity} at {to})"
        return f"Path({ask.quantity} from ({ask.source[0]}, {ask.source[1]}) to {to})"

    def problems(self) -> tuple[Diagnostic, ...]:
        """What stands against the question, errors and warnings, found from the graph alone."""
        from acsolve.circuit.check import check_question

        ask = self.ask
        return check_question(
            self.circuit.netlist,
            ask.source,
            ask.target,
            quantity="voltage-ratio" if ask.quantity == "response" else ask.quantity,
            ammeter=ask.ammeter,
        )

    def closed_form(
        self, *, symbolic: bool = False, keep: str | Iterable[str] = (), budget: int | None = None
    ) -> ClosedForm:
        """The exact closed form, checked against an independent numeric solution.

        Parameters
        ----------
        symbolic : ignore all numbers: every part is its own symbol.
        keep : names of parts and quantities that stay symbols ("R1, C1", or several texts),
            the others take their values.
        budget : the most terms that may be held at once, default four million.

        Raises
        ------
        EquationError
            [equations.singular], [equations.undriven]: the question has no answer;
            [equations.budget]: too many terms, for which `nested_form` is the answer.
        """
        from acsolve.analyses.transfer import DEFAULT_BUDGET, closed_form

        return closed_form(
            self.circuit.netlist,
            self.ask,
            symbols_of(symbolic, keep, self.circuit.netlist),
            budget=DEFAULT_BUDGET if budget is None else checked_budget(budget),
        )

    def nested_form(self, *, symbolic: bool = False, keep: str | Iterable[str] = ()) -> NestedForm:
        """The closed form as named steps, for networks too large to multiply out.

        Raises
        ------
        EquationError
            [equations.singular]: the question has no answer.
        """
        from acsolve.analyses.nested import nested_form

        return nested_form(
            self.circuit.netlist, self.ask, symbols_of(symbolic, keep, self.circuit.netlist)
        )

    def transfer(
        self,
        *,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        budget: int | None = None,
        nested: bool = False,
    ) -> TransferAnswer:
        """The closed form with its limits, standard form, poles and zeros.

        Expanded where it fits the budget; past it, or with `nested`, as named steps.
        """
        from acsolve.analyses.transfer import DEFAULT_BUDGET, form_within, transfer_answer

        form = form_within(
            self.circuit.netlist,
            self.ask,
            symbols_of(symbolic, keep, self.circuit.netlist),
            budget=DEFAULT_BUDGET if budget is None else checked_budget(budget),
            as_nested=nested,
        )
        return transfer_answer(form)

    def poles(
        self,
        *,
        digits: int | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        form: ClosedForm | None = None,
    ) -> PoleAnswer:
        """Poles, zeros, hidden modes and stability, exact where they can be.

        Parameters
        ----------
        digits : of each part of each root, as text; 1 to 1,000.
        form : the closed form, where it is known already; worked out by default.

        Returns
        -------
        Tables of roots in rad/s with multiplicity, closed form, natural frequency and
        damping. Of an order above 160 they are eigenvalues of the network's matrix, which the
        table calls not certified.

        Raises
        ------
        AnalysisError
            [option.value] the number of digits is none.
        EquationError
            as `closed_form`.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse("in -- R1 -- a -- L1 -- out -- C1 -- gnd")
        >>> found = circuit.path("in", "out").poles()
        >>> found.poles.roots[0].w0_form, found.stability.verdict
        ('1/sqrt(L1*C1)', 'stable')
        """
        from acsolve.analyses.pole_record import pole_answer

        if digits is not None and (isinstance(digits, bool) or not isinstance(digits, int)):
            raise refuse(
                "option.value", f"{digits!r} is no number of digits", "Give a whole number."
            )
        known = form or self.closed_form(symbolic=symbolic, keep=keep)
        found = pole_answer(known, digits=digits)
        if known.symbols or not known.rational or (found.poles and found.zeros):
            return found
        from acsolve.analyses.estimated_roots import estimated_tables

        tables = estimated_tables(self.circuit.netlist, self.ask)
        return found if tables is None else replace(found, poles=tables[0], zeros=tables[1])

    def assume(
        self, assumptions: str | Iterable[str], *, band: BandLike | None = None
    ) -> Approximation:
        """The closed form to leading order in assumed small ratios, with its error.

        Parameters
        ----------
        assumptions : "R2 >> R1", or several, with commas or as several texts.
        band : where the error is measured ("10 Hz .. 1 MHz", or two numbers in
            hertz); by default from a decade below the lowest to a decade above the highest
            natural frequency.

        Raises
        ------
        AnalysisError
            [option.value] an assumption that does not read, or names what is no symbol.
        """
        from acsolve.analyses.approximate import assume

        wanted = texts_of(assumptions, "assumptions")
        edges = None if band is None else self.circuit.edges(band)
        form = self.closed_form(symbolic=True)
        return assume(form, wanted, netlist=self.circuit.netlist, band=edges)

    def simplify(
        self, band: BandLike, *, within: float | str = 0.01, tolerances: bool = True
    ) -> Approximation:
        """The closed form without the terms that hardly change the response over a band.

        Parameters
        ----------
        band : "10 Hz .. 1 MHz", or two numbers in hertz.
        within : the largest relative change of the response, 0.01 or "1%" for 1 %.
        tolerances : whether that holds over the tolerances of the parts too.

        Raises
        ------
        AnalysisError
            [sweep.band] it is no band; [option.value] `within` is no share below one.
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.approximate import simplify

        edges, share = self.circuit.edges(band), share_of(within)
        form = self.closed_form(symbolic=True)
        return simplify(
            form,
            self.circuit.netlist,
            band=edges,
            within=share,
            tolerances=tolerances,
        )

    def cutoffs(
        self,
        level: str | float | None = None,
        *,
        reference: ReferenceLike | None = None,
        band: BandLike | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        degree: int = 2,
    ) -> CutoffAnswer:
        """Every frequency where the gain crosses a level below its reference.

        Parameters
        ----------
        level : in dB relative to the reference, a number or a text ("-6 dB"); None, or
            -3 dB, is half power, exactly 1/sqrt(2).
        reference : "dc", "infinity", "peak" or a stated gain; None chooses by the shape.
        band : only within "10 Hz .. 1 MHz", or two numbers in hertz, above zero. Without one
            all frequencies are meant where the response is a ratio of polynomials in s; with
            lines, constant-phase parts and the like, or in very large networks, a band
            from the network's own time scales. `searched` of the answer says which.
        degree : closed forms are written where the equation in ω² is of this degree at most:
            2, or up to 4 for those who can use them.

        Raises
        ------
        AnalysisError
            [question.no-reference], [question.no-value], [sweep.band];
            [equations.not-rational] symbols beside a line or another function of s;
            [option.value] the level or the reference is no finite number.
        """
        from acsolve.analyses.cutoff import cutoffs
        from acsolve.analyses.scan import form_or_none, large_cutoffs

        wanted, counted = level_of(level), reference_of(reference)
        netlist = self.circuit.netlist
        edges = None if band is None else self.circuit.edges(band)
        form = form_or_none(netlist, self.ask, symbols_of(symbolic, keep, netlist))
        if form is None:
            return large_cutoffs(netlist, self.ask, level=wanted, reference=counted, band=edges)
        return cutoffs(
            form,
            level=wanted,
            reference=counted,
            formula=self._formula(form, max(_checked_degree(degree), _WRITTEN_ORDER)),
            band=edges,
            degree=degree,
        )

    def step(
        self,
        duration: float | str | None = None,
        *,
        drive: DriveLike = "step",
        band: float | str = 0.02,
        points: int = 501,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
    ) -> StepAnswer:
        """The response in time to a unit step, a unit impulse, or a sine that starts at 0.

        Parameters
        ----------
        duration : of the curve in seconds, or "5 ms"; by default until all has happened.
        drive : "step", "impulse", the frequency of a sine that goes on ("1 kHz", or hertz), or
            a frequency with the whole or half cycles that it lasts: ("1 kHz", 5).
        band : half the settling band as a share of the final value, 0.02 or "2%".
        points : of the curve.

        Raises
        ------
        AnalysisError
            [option.value], [sweep.band], [sweep.points] what is asked does not fit.
        EquationError
            [equations.not-rational] lines and the like have no residues; [equations.budget]
            more than 160 poles. Symbols that stay leave the closed form in time, of first and
            second order, and the moments.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse('''
        ...     in -- R1 = 1 kohm -- out
        ...     out -- C1 = 1 uF -- gnd
        ... ''')
        >>> found = circuit.path("in", "out").step()
        >>> f"{found.rise_s:.6g} {found.delay_s:.6g} {found.at(1e-3):.6f}"
        '0.00219722 0.000693147 0.632121'
        """
        from acsolve.analyses.steady import steady_sine
        from acsolve.analyses.step import step_answer
        from acsolve.drive import band_share, drive_of, duration_of, points_of

        netlist = self.circuit.netlist
        acting = drive_of(drive, netlist)
        length, share, count = duration_of(duration, netlist), band_share(band), points_of(points)
        form = self.closed_form(symbolic=symbolic, keep=keep)
        found = step_answer(
            form,
            duration=length,
            points=count,
            drive=acting,
            band=share,
            formula=self._formula(form),
        )
        if acting.hertz is None or not found.stable:
            return found
        return replace(found, steady=steady_sine(netlist, self.ask, float(acting.hertz)))

    def sine(self, hertz: float | str) -> SteadySine:
        """The steady answer to a sine: amplitude, phase, its delay, and the group delay there.

        Parameters
        ----------
        hertz : one frequency above 0 Hz, a number or a text ("1 kHz").

        Raises
        ------
        AnalysisError
            [sweep.band] it is none.
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.steady import steady_sine
        from acsolve.drive import hertz_of

        netlist = self.circuit.netlist
        return steady_sine(netlist, self.ask, float(hertz_of(hertz, netlist)))

    def value_for(
        self,
        name: str,
        *,
        cutoff: str | float,
        level: str | float | None = None,
        reference: ReferenceLike | None = None,
        degree: int = 2,
    ) -> ValueAnswer:
        """The values of a part that put a cutoff at a wanted frequency.

        Parameters
        ----------
        name : the part, an attribute (`L1.quality`) or a quantity.
        cutoff : the frequency, "1 kHz" or a number in hertz, above zero.
        level, reference : as for `cutoffs`; the reference follows the value.
        degree : closed forms are written up to this degree in the value, four at most.

        Returns
        -------
        Every positive value in SI units, with proof that none is missing, its closed form where
        there is one, and how exactly the gain is met when it is put back; over symbols the
        closed forms alone, which call the angular frequency of the cutoff `w`.

        Raises
        ------
        AnalysisError
            [question.unknown-name], [question.no-reference], [question.no-value],
            [equations.not-rational], [sweep.band]; [equations.budget] the peak is the reference
            and the order above 8; [option.value] the answer does not depend
            on the value, or the degree is none.

        Examples
        --------
        >>> import acsolve
        >>> path = acsolve.parse("in -- R1 -- out -- C1 -- gnd").path("in", "out")
        >>> path.value_for("R1", cutoff="1 kHz").values[0].closed_form
        '1/(w*C1)'
        """
        from acsolve.analyses.value_equation import WantedCutoff
        from acsolve.analyses.value_for import value_for as answered

        netlist = self.circuit.netlist
        dimension = dimension_of(name, netlist)
        wanted = self.circuit.frequencies([cutoff] if not isinstance(cutoff, str) else cutoff)
        if wanted.size != 1 or not wanted.flat[0] > 0:
            raise refuse(
                "sweep.band",
                f"{cutoff} is not one frequency above zero",
                'Give a single one, as "1 kHz".',
            )
        asked = WantedCutoff(
            hertz=exact(float(wanted.flat[0])),
            level=level_of(level),
            reference=reference_of(reference),
            degree=_checked_degree(degree),
        )
        return answered(netlist, self.ask, name, asked, dimension=dimension)

    def _formula(self, form: ClosedForm, degree: int = 2) -> ClosedForm | None:
        """The same question over symbols, where its cutoffs can have a closed form at all."""
        if form.symbols or not form.rational:
            return None
        if any(len(part) > degree + 1 for part in form.coefficients()):
            return None
        try:
            return self.closed_form(symbolic=True, budget=_LARGEST_FORMULA)
        except EquationError as error:
            if error.code != "equations.budget":
                raise
            return None

    def response(
        self,
        hertz: ArrayLike | str,
        *,
        values: Mapping[str, ArrayLike] | None = None,
        checked: bool = True,
    ) -> NDArray[np.complex128]:
        """The complex response at frequencies in hertz; any shape in, the same shape out.

        A text is read as `sweep` reads it.

        Parameters
        ----------
        hertz : frequencies, or a text.
        values : samples of values: name of a part, an attribute (`L1.quality`), a coupling
            or a quantity -> real numbers in SI units, of shapes that broadcast among each
            other. What the file makes of a varied value follows it. The answer then has the
            shape (*samples, *hertz.shape), 16 bytes a number, and is worked out in blocks
            without a loop over the samples.
        checked : False leaves out the check of each point, for speed: a long ladder is answered
            about five times faster, and a point that lost its digits stays unnoticed. Samples
            have rules of their own and take no notice.

        Raises
        ------
        AnalysisError
            [sweep.band] they are no finite frequencies from 0 Hz upwards;
            [question.unknown-name] nothing has that name; [option.value] values are not
            finite real numbers, or do not broadcast; [sweep.points] the answer would take
            more than 4 GiB or half of the memory.
        EquationError
            [question.no-value] a part has no value.

        Examples
        --------
        >>> import acsolve, numpy as np
        >>> circuit = acsolve.parse('''
        ...     in -- R1 -- out -- C1 -- gnd
        ...     R1 = 1 kohm
        ...     C1 = 1 uF
        ... ''')
        >>> path = circuit.path("in", "out")
        >>> path.response([10, 100, 1000], values={"R1": np.linspace(900, 1100, 5)}).shape
        (5, 3)
        """
        frequencies = self.circuit.frequencies(hertz)
        if values is not None:
            from acsolve.analyses.samples import responses

            return responses(self.circuit.netlist, self.ask, frequencies, values)
        from acsolve.analyses.sweep import response

        return response(self.circuit.netlist, self.ask, frequencies, checked=checked)

    def sweep(
        self, hertz: ArrayLike | str, *, points: str | int | None = None, linear: bool = False
    ) -> Sweep:
        """Gain, continuous phase, phase delay and group delay over frequency.

        Parameters
        ----------
        hertz : frequencies, or a text: a band ("10 Hz .. 1 MHz") or single ones
            ("50 Hz, 60 Hz").
        points : with a band: "50/decade" (default), a number of points, or "auto" for as
            many as straight lines between them need to err by no more than 0.01 dB and
            0.1 degrees; `Sweep.placed` then says what that rests on.
        linear : with a band: even steps instead of even ratios, lines over linear frequency.

        Raises
        ------
        AnalysisError
            [sweep.band], [sweep.points].
        TextError
            codes of the text format for a text that does not read.
        """
        from acsolve.analyses.sweep import sweep

        circuit = self.circuit
        if points == "auto":
            from acsolve.analyses.adaptive import adaptive_sweep

            band: Any = hertz  # refused where it is none
            return adaptive_sweep(circuit.netlist, self.ask, circuit.edges(band), linear=linear)
        frequencies = circuit.frequencies(hertz, points=points, linear=linear)
        return sweep(circuit.netlist, self.ask, frequencies)

    def verify(self, found: Sweep, *, points: int | Literal["all"] | None = None) -> Verification:
        """Proven bounds of the errors of a sweep of this path, from ball arithmetic.

        Parameters
        ----------
        found : what `sweep` answered.
        points : how many of its points, or "all"; by default a handful: both ends, the
            middle, the largest estimated errors, the highest and the lowest gain.

        Raises
        ------
        EquationError
            [equations.check-failed] a point is proven to err by more than the sweep claims.
        AnalysisError
            [option.value] `points` is no number of points, or `found` no sweep.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse('''
        ...     in -- R1 = 1 kohm -- out
        ...     out -- C1 = 1 uF -- gnd
        ... ''')
        >>> path = circuit.path("in", "out")
        >>> proven = path.verify(path.sweep("10 Hz .. 1 MHz"))
        >>> proven.points, proven.max_relative_error < 1e-14, proven.unproven
        (7, True, ())
        """
        from acsolve.analyses.sweep import Sweep
        from acsolve.analyses.verify_sweep import verify_sweep

        if not isinstance(found, Sweep):
            raise refuse("option.value", f"{found!r} is no sweep", "Give what `sweep` answered.")
        number = isinstance(points, int) and not isinstance(points, bool) and points >= 1
        if not (number or points is None or points == "all"):
            raise refuse(
                "option.value",
                f"{points!r} is no number of points",
                'Give a whole number from 1, or "all".',
            )
        return verify_sweep(self.circuit.netlist, self.ask, found, points).confirmed()


_LARGEST_FORMULA = 2_000  # terms; the closed form of a larger network is no longer read
_WRITTEN_ORDER = 6  # up to here the corners of a response are looked for in closed form


def _checked_degree(degree: Any) -> int:
    if isinstance(degree, bool) or not isinstance(degree, int) or not 1 <= degree <= 4:
        raise refuse("option.value", f"{degree!r} is no degree", "Give 1, 2, 3 or 4.")
    return degree


def checked_budget(budget: Any) -> int:
    """The most terms that may be held at once, refused where it is no number of them."""
    if isinstance(budget, bool) or not isinstance(budget, int) or budget < 1:
        raise refuse(
            "option.value", f"{budget!r} is no number of terms", "Give a whole number from 1."
        )
    return budget


def symbols_of(symbolic: bool, keep: str | Iterable[str], netlist: Netlist) -> Any:
    """Which values stay symbols, as callers name them."""
    from acsolve.equations.exact import Symbols

    return Symbols(symbolic=symbolic, keep=names_of(keep, netlist))
