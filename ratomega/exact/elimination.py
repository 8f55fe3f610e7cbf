"""Contraction with the inverse of a symmetric form whose entries are exact series in t.

Over series with coefficients in a field, a form can be diagonalised by t-integral changes of basis alone, when every
pivot is an entry of the lowest valuation that is left. So nothing is lost on the way: the rest of the form keeps the
precision of the start, and with v the highest valuation of a pivot the answer loses 2 v. A form over numbers is the
case of precision 1, where every valuation is 0; rational ones are solved by flint, which lifts from a prime.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq, fmpq_mat, fmpq_poly

from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import only_rational
from ratomega.exact.rational import ZERO

__all__ = ["diagonalised_contraction", "inverse_contraction"]

Rows = Sequence[Sequence[Laurent]]


def inverse_contraction(form: Rows, left: Rows, right: Rows, *, precision: int) -> Laurent:
    """The trace of left^T form^(-1) right, to ``precision`` at most.

    ``form`` is symmetric, n x n; ``left`` and ``right`` are n x m (m = 1 makes it a scalar product). All entries have
    valuation 0 or more. The precision of the answer tells how far it is known; a pole of the inverse that does not
    cancel is a negative valuation of the answer.

    Raises ``ZeroDivisionError`` when the form is degenerate as far as it is known.

    >>> t = Laurent.from_coefficients(1, [1], precision=4)
    >>> one, zero = Laurent.constant(1, precision=4), Laurent.zero(precision=4)
    >>> str(inverse_contraction([[zero, t], [t, zero]], [[one], [zero]], [[zero], [one]], precision=1))
    '1*t^-1 + O(t^1)'
    """
    matrix, one_side, other_side = _as_matrix(form), _as_matrix(left), _as_matrix(right)
    if matrix is not None and one_side is not None and other_side is not None:
        return Laurent.constant(_over_q(matrix, one_side, other_side), precision=min(1, precision))
    return diagonalised_contraction(form, left, right, precision=precision)


def _as_matrix(rows: Rows) -> fmpq_mat | None:
    """The rows as rational numbers; None when an entry is a longer series or lies beyond Q."""
    values: list[list[fmpq]] = []
    for row in rows:
        if not all(x.precision == 1 and x.valuation >= 0 and isinstance(x.poly, fmpq_poly) for x in row):
            return None
        values.append([only_rational(x.coefficient(0)) for x in row])
    return fmpq_mat(values)


def _over_q(form: fmpq_mat, left: fmpq_mat, right: fmpq_mat) -> fmpq:
    solution = form.solve(right)
    columns = range(left.ncols())
    return sum((left[i, j] * solution[i, j] for i in range(left.nrows()) for j in columns), ZERO)


def diagonalised_contraction(form: Rows, left: Rows, right: Rows, *, precision: int) -> Laurent:
    """``inverse_contraction`` for every kind of entries. Cost: n^3/6 + 2 m n^2/2 products of series."""
    size = len(form)
    rows = [[form[min(i, j)][max(i, j)] for j in range(size)] for i in range(size)]
    lefts, rights = [list(row) for row in left], [list(row) for row in right]
    remaining = list(range(size))
    total = Laurent.zero(precision=precision)
    while remaining:
        pivot = _pivot(rows, lefts, rights, remaining)
        remaining.remove(pivot)
        inverse = rows[pivot][pivot].inverse()
        for x, y in zip(lefts[pivot], rights[pivot], strict=True):
            total = total + x * y * inverse
        for place, k in enumerate(remaining):
            if rows[pivot][k].is_zero():
                continue
            factor = -(rows[pivot][k] * inverse)
            for j in remaining[place:]:
                rows[k][j] = rows[j][k] = rows[k][j] + factor * rows[pivot][j]
            _add(lefts[k], lefts[pivot], factor)
            _add(rights[k], rights[pivot], factor)
    return total


def _add(row: list[Laurent], other: Sequence[Laurent], factor: Laurent) -> None:
    for index, x in enumerate(other):
        if not x.is_zero():
            row[index] = row[index] + factor * x


def _pivot(rows: list[list[Laurent]], left: list[list[Laurent]], right: list[list[Laurent]], places: list[int]) -> int:
    """A place whose diagonal entry has the lowest valuation of all that is left, the basis changed if there is none."""
    best = min(places, key=lambda i: rows[i][i].valuation)
    low = rows[best][best].valuation
    if low > 0 or rows[best][best].is_zero():
        valuation, i, j = min((rows[i][j].valuation, i, j) for i in places for j in places if i <= j)
        if rows[i][j].is_zero():
            raise ZeroDivisionError("the form is degenerate as far as it is known")
        if valuation < low:
            # Both diagonal entries are higher, so that of e_i + e_j is led by twice the entry between them.
            for k in places:
                rows[i][k] = rows[i][k] + rows[j][k]
            for k in places:
                rows[k][i] = rows[k][i] + rows[k][j]
            left[i] = [x + y for x, y in zip(left[i], left[j], strict=True)]
            right[i] = [x + y for x, y in zip(right[i], right[j], strict=True)]
            return i
    return best
