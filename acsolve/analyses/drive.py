"""What drives a network from t = 0 on, everything being at rest before."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Literal

from acsolve.algebra.laplace import over_s, times_sine
from acsolve.algebra.residue import Ratio
from acsolve.algebra.taylor import point

DriveName = Literal["step", "impulse", "sine"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Drive:
    """What acts from t = 0 on: a unit step, a unit impulse, or sin(2·pi·hertz·t).

    `cycles` is the length of the sine, a multiple of a half; None lets it go on.
    """

    kind: DriveName = "step"
    hertz: Fraction | None = None
    cycles: Fraction | None = None

    @property
    def seconds(self) -> Fraction | None:
        """How long a sine lasts, None where it goes on."""
        if self.cycles is None or self.hertz is None:
            return None
        return self.cycles / self.hertz

    def omega(self) -> Any:
        """The sine's angular frequency as a ball at the precision in force."""
        from flint import arb

        assert self.hertz is not None, "a sine has a frequency"
        return 2 * arb.pi() * point(self.hertz)

    def acting_on(self, ratio: Ratio) -> Ratio:
        """The transform of the response to a drive that goes on."""
        if self.kind == "step":
            return over_s(ratio)
        return ratio if self.kind == "impulse" else times_sine(ratio, self.omega)


STEP = Drive()
