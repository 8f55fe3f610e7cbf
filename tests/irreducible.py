"""Blocks of irreducible Virasoro modules from Gram matrices, in fractions: no diagrams, nothing of the package.

The Gram matrix of a degenerate module is singular. Rows are taken as long as they are independent; the null vectors
are left out, which is right where their overlaps with the fields vanish, and ``block`` asserts that they do.
"""

from __future__ import annotations

from fractions import Fraction
from functools import cache


def partitions(n, largest=None):
    """All partitions of n, as descending tuples."""
    if n == 0:
        yield ()
        return
    for first in range(min(n, largest or n), 0, -1):
        for rest in partitions(n - first, first):
            yield (first, *rest)


@cache
def raised(n, word, c, h):
    """L_n L_-word |h> for n > 0 as {word: coefficient}; words need no order."""
    if not word:
        return {}
    first, rest = word[0], word[1:]
    result = {(first, *w): x for w, x in raised(n, rest, c, h).items()}
    step = n - first
    if step > 0:
        terms = raised(step, rest, c, h)
    else:
        terms = {rest: h + sum(rest)} if step == 0 else {(-step, *rest): Fraction(1)}
    central = c * n * (n * n - 1) / 12 if step == 0 else 0
    for w, x in terms.items():
        result[w] = result.get(w, 0) + (n + first) * x
    if central:
        result[rest] = result.get(rest, 0) + central
    return result


def overlap(left, right, c, h):
    """<h| L_left' L_-right |h>, left' being the modes of left in the opposite order."""
    state = {right: Fraction(1)}
    for n in left:
        after: dict = {}
        for word, x in state.items():
            for w, y in raised(n, word, c, h).items():
                after[w] = after.get(w, 0) + x * y
        state = after
    return state.get((), Fraction(0))


def vertex(word, h, second, first):
    """<h'| V_second(1) L_-word |h> over its value without descendants, with h' = first."""
    result = Fraction(1)
    for n, mode in enumerate(word):
        result *= h + mode * second - first + sum(word[n + 1 :])
    return result


def block(c, h, fields, level):
    """The coefficients 0 ... level for the weights of the fields at 0, x, 1, infinity, and the ranks of the Gram
    matrices."""
    values, ranks = [], []
    for n in range(level + 1):
        words = list(partitions(n))
        left = [vertex(word, h, fields[1], fields[0]) for word in words]
        right = [vertex(word, h, fields[2], fields[3]) for word in words]
        gram = [[overlap(u, v, c, h) for v in words] for u in words]
        value, rank = _contracted(gram, left, right)
        values.append(value)
        ranks.append(rank)
    return values, ranks


def _contracted(gram, left, right):
    """left G^-1 right on the quotient by the null vectors, by symmetric elimination; and the rank."""
    size = len(gram)
    rows = [[*gram[i], left[i], right[i]] for i in range(size)]
    todo, value, rank = list(range(size)), Fraction(0), 0
    while True:
        pivot = next((i for i in todo if rows[i][i] != 0), None)
        if pivot is None:
            mixed = next(((i, j) for i in todo for j in todo if rows[i][j] != 0), None)
            if mixed is None:
                break
            # No vector of the basis has a norm: the sum of two has one.
            i, j = mixed
            rows[i] = [x + y for x, y in zip(rows[i], rows[j], strict=True)]
            for row in rows:
                row[i] += row[j]
            continue
        todo.remove(pivot)
        rank += 1
        value += rows[pivot][size] * rows[pivot][size + 1] / rows[pivot][pivot]
        for i in todo:
            factor = rows[i][pivot] / rows[pivot][pivot]
            if factor:
                rows[i] = [x - factor * y for x, y in zip(rows[i], rows[pivot], strict=True)]
    assert all(rows[i][size] == rows[i][size + 1] == 0 for i in todo), "a null vector couples"
    return value, rank
