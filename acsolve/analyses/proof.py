"""What ball arithmetic proves about points of a sweep: upper bounds, failures, mistakes."""

from __future__ import annotations

from dataclasses import dataclass

from acsolve.errors import Diagnostic, EquationError


@dataclass(frozen=True, slots=True, kw_only=True)
class Proof:
    """Proven upper bounds of the errors of one point; infinite where the answer is worthless.

    hertz : the point.
    relative_error : of the complex value; of what gain and phase tell, where that is beyond a
        double's range.
    gain_error_db, phase_error_deg : the phase but for whole turns.
    group_delay_error_s : None where no delay was reported, as for phase and gain.
    claimed : the relative error that the sweep itself estimated.
    bits : working precision of the balls.
    wrong : which of "value", "gain", "phase" and "group delay" are proven to err by more than
        what was claimed and rounding allow.
    """

    hertz: float
    relative_error: float
    gain_error_db: float | None
    phase_error_deg: float | None
    group_delay_error_s: float | None
    claimed: float
    bits: int
    wrong: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Unproven:
    """A point for which the balls prove nothing, and why."""

    hertz: float
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Verification:
    """What was proven about the chosen points of a sweep."""

    proofs: tuple[Proof, ...]
    unproven: tuple[Unproven, ...]

    @property
    def points(self) -> int:
        """How many points are proven."""
        return len(self.proofs)

    @property
    def worst(self) -> Proof | None:
        """The point of the largest relative error; None where nothing is proven."""
        return max(self.proofs, key=lambda item: item.relative_error, default=None)

    @property
    def max_relative_error(self) -> float | None:
        """The largest relative error of the proven points."""
        return None if self.worst is None else self.worst.relative_error

    @property
    def bits(self) -> int | None:
        """The highest working precision that was used."""
        return max((item.bits for item in self.proofs), default=None)

    @property
    def wrong(self) -> tuple[Proof, ...]:
        """The points that err by more than the sweep claimed: a defect of this program."""
        return tuple(item for item in self.proofs if item.wrong)

    def largest(self, name: str) -> float | None:
        """The largest of one of the errors, by the name of its field; None where none is told."""
        values = [getattr(item, name) for item in self.proofs]
        return max((item for item in values if item is not None), default=None)

    def confirmed(self) -> Verification:
        """Itself.

        Raises
        ------
        EquationError
            [equations.check-failed] if a point is proven to be wrong.
        """
        if not self.wrong:
            return self
        raise EquationError([_complaint(item) for item in self.wrong[:_SHOWN]])


_SHOWN = 5  # wrong points that are told one by one


def _complaint(item: Proof) -> Diagnostic:
    *others, last = item.wrong
    what = f"{', '.join(others)} and {last}" if others else last
    return Diagnostic(
        code="equations.check-failed",
        message=f"the sweep is proven wrong at {item.hertz!r} Hz, in its {what}: relative error "
        f"{item.relative_error:.2g}, where it claims {item.claimed:.2g}",
        hint="This is a defect of acsolve; please report the circuit.",
    )
