"""Z of U(2) from Gram matrices: blocks level by level, times the U(1) factor, on the path or at its end.

At levels where the Kac determinant does not vanish at the limit point everything is done with numbers. Where it does,
the Gram matrix is inverted over exact series in t, to the precision that the worst pole asks for; what is left after
all levels are put together is the limit, or a pole that survives.
"""

from __future__ import annotations

from ratomega.conformal.dictionary import Dealing, GaugePath, SphereBlock, TorusBlock, conformal_block, kac_order
from ratomega.conformal.gram import VermaModule, verma_module
from ratomega.conformal.vertex import state_column, vertex_matrices
from ratomega.exact.elimination import inverse_contraction
from ratomega.exact.laurent import Laurent

__all__ = ["block_coefficients", "first_singular_level", "gauge_coefficients"]


def block_coefficients(block: SphereBlock | TorusBlock, first: int, last: int) -> tuple[Laurent, ...]:
    """The coefficients of the block at levels ``first`` ... ``last``, without the U(1) factor.

    Raises ``ZeroDivisionError`` when a Gram matrix is degenerate to the precision of the block. Cost with numbers of
    few digits, to level 8 and to level 10: 0.06 s and 0.2 s on the sphere, 0.2 s and 0.7 s on the torus; over a
    quadratic field or over series of nine terms 0.4 s and 3 s on the sphere, 1.2 s to level 8 on the torus.
    """
    module = verma_module(block.internal, block.central, last)
    precision = module.precision
    if isinstance(block, TorusBlock):
        table = vertex_matrices(module, module, block.field, last, half=True)
        return tuple(
            inverse_contraction(module.gram[k], _identity(module, k), table[k, k], precision=precision)
            for k in range(first, last + 1)
        )
    found = []
    for k in range(first, last + 1):
        left, right = ([[x] for x in state_column(module, end, k)] for end in (block.left, block.right))
        found.append(inverse_contraction(module.gram[k], left, right, precision=precision))
    return tuple(found)


def _identity(module: VermaModule, level: int) -> list[list[Laurent]]:
    size = len(module.states[level])
    return [[module.constant(int(i == j)) for j in range(size)] for i in range(size)]


def first_singular_level(gauge: GaugePath, last: int) -> int:
    """The lowest level up to ``last`` at which the Kac determinant vanishes at the limit point; ``last`` + 1: none."""
    return next((level for level in range(1, last + 1) if kac_order(gauge, level)), last + 1)


def gauge_coefficients(gauge: GaugePath, last: int, *, dealing: Dealing | None = None) -> tuple[Laurent, ...]:
    """Z_0 ... Z_last on the path, each known up to t^0 at least; a negative valuation is a pole that survives.

    ``dealing`` as in ``conformal_block``; any one gives the same. Raises ``PathError`` where the path needs a tilt.

    >>> from ratomega.exact.path import Linear
    >>> from ratomega.exact.rational import Rational
    >>> one, moving = Linear(Rational(1)), Linear(Rational(1), Rational(1))
    >>> pure = GaugePath(one, moving, Linear(Rational(2, 3)), (), None)         # eps1 = eps2 = 1, a = 1/3
    >>> [str(z.coefficient(0)) for z in gauge_coefficients(pure, 2)]
    ['1', '9/16', '23409/189728']
    >>> resonant = GaugePath(one, moving, Linear(Rational(2), Rational(2, 7)), (), None)        # a = 1 + t/7
    >>> str(gauge_coefficients(resonant, 1)[1].truncated(0))
    '7/10*t^-1 + O(t^0)'
    """
    singular = first_singular_level(gauge, last)
    numbers = conformal_block(gauge, precision=1, dealing=dealing)
    levels = list(block_coefficients(numbers, 0, singular - 1))
    dressing = numbers.dressing
    if singular <= last:
        # The inverse of a form that is wrong from t^p on, with poles of order v, is wrong from t^(p - 2v) on.
        block = conformal_block(gauge, precision=1 + 2 * kac_order(gauge, last), dealing=dealing)
        levels += block_coefficients(block, singular, last)
        dressing = block.dressing
    factor = dressing.coefficients(last)
    found = []
    for k in range(last + 1):
        total = factor[0] * levels[k]
        for j in range(1, k + 1):
            total = total + factor[j] * levels[k - j]
        found.append(total)
    return tuple(found)
