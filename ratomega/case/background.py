"""The Omega-background: eps1, eps2 and the path on which the limit point is approached."""

from __future__ import annotations

from dataclasses import dataclass

from ratomega.case.affine import Affine
from ratomega.case.expression import INNER
from ratomega.errors import InputError, Problem
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import is_quadratic, only_rational
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["Background"]


@dataclass(frozen=True, slots=True)
class Background:
    """eps1 and eps2 as linear forms in t, and their slopes in u. Build it with ``Background.make``."""

    eps1: Linear
    eps2: Linear
    inner: tuple[Rational, Rational] = (ZERO, ZERO)

    @classmethod
    def make(cls, eps1: Affine, eps2: Affine) -> Background:
        """Where neither t nor u occurs, the path is eps2 + t. Raises ``InputError`` when eps1 or eps2 is zero at the
        limit.

        >>> str(Background.make(Affine(ONE), Affine(ONE)).eps2)
        '1 + t'
        """
        problems = []
        for name, value in (("eps1", eps1), ("eps2", eps2)):
            if value.eps1 != 0 or value.eps2 != 0:
                problems.append(Problem("in eps1 and eps2 themselves only t and u may occur", name))
            elif any(is_quadratic(x) for x in (value.constant, value.t, value.coefficient(INNER))):
                problems.append(
                    Problem(
                        f"{name} = {value} is not rational; i and sqrt(d) may stand in all other parameters, but "
                        "eps1 and eps2 are rational (Z depends on ratios of parameters alone: divide all by eps1)",
                        name,
                    )
                )
            elif value.constant == 0:
                problems.append(
                    Problem(
                        f"{name} is zero at the limit point; there every weight diverges on its own and no cluster is "
                        "compact, so this limit (Nekrasov-Shatashvili) is not treated; choose a non-zero value",
                        name,
                    )
                )
        if problems:
            raise InputError(problems)
        inner = only_rational(eps1.coefficient(INNER)), only_rational(eps2.coefficient(INNER))
        moves = any(x != 0 for x in (eps1.t, eps2.t, *inner))
        return cls(Linear(eps1.constant, eps1.t), Linear(eps2.constant, eps2.t if moves else ONE), inner)

    def affine(self) -> tuple[Affine, Affine]:
        """eps1 and eps2 as expressions in t and u."""
        pairs = zip((self.eps1, self.eps2), self.inner, strict=True)
        one, two = (Affine(e.constant, t=e.slope, symbols=((INNER, u),) if u != 0 else ()) for e, u in pairs)
        return one, two

    @property
    def ratio(self) -> Rational:
        """eps2 / eps1 at the limit point."""
        return only_rational(self.eps2.constant / self.eps1.constant)

    @property
    def steps(self) -> tuple[int, int]:
        """(alpha, beta): eps1 : eps2 in lowest terms, alpha > 0; beta has the sign of the ratio.

        >>> Background.make(Affine(Rational(2)), Affine(Rational(-3))).steps
        (2, -3)
        """
        return int(self.ratio.q), int(self.ratio.p)
