"""Four-point blocks of minimal models that are known functions.

A block is x^(h - h_0 - h_x) times a series with constant term 1, and that series is what stands here; V_0(0) V_x(x)
fuse to the internal field, and V_1(1), V_inf(infinity) close the channel.

The same function gives eight blocks: reading the four fields backwards changes nothing; exchanging 0 <-> x and 1 <->
infinity at once is the projective map z -> (z - x)/(z - 1) and costs (1 - x)^(h_0 - h_x - h_1 + h_inf); exchanging 1
<-> infinity alone is z -> z/(z - 1), costs (1 - x)^(h_0 - h_x - h) and takes x to x/(x - 1).

*Ising*, M(3,4): spin = (1,2) of weight 1/16, energy = (1,3) = (2,1) of weight 1/2, a free fermion psi with the mode
algebra {psi_m, psi_n} = delta; in the spin field's sector psi_0^2 = 1/2. *Lee-Yang*, M(2,5): phi = (1,2) = (1,3) of
weight -1/5; blocks from its second-order equation. *Tricritical Ising*, M(4,5): the field (3,1) = (1,4) of weight 3/2
is the supercurrent G of an N = 1 algebra, and (2,2), (2,1) are its Ramond ground states. {G_m, G_n} = 2 L_(m+n) +
(c/3)(m^2 - 1/4) delta fixes its correlators, and by the fusion rules of M(4,5) each of them is one block: G G fuses
to (1,1) alone, G (2,2) to (2,2), G (2,1) to (2,1). With G_0^2 = h - c/24 on a ground state of weight h,

    <h| G(1) G(x) |h> = x^(-3/2) (h - c/24 + 2 h x/(1-x) + (c/3) (x (1+x)/(1-x)^3 - x/(4 (1-x)))).

No other equation is needed. The fields (3,1) and (2,2) obey equations of third and fourth order: the blocks with these
alone are no 2F1 of a field (1,2) or (2,1).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import product

from ratomega.conformal.minimal import FourPoint, Label, MinimalModel
from ratomega.exact.power import composed, exponential, logarithmic_derivative
from ratomega.exact.power import product as series_product
from ratomega.exact.rational import ONE, ZERO, Rational

__all__ = ["KNOWN_BLOCKS", "KnownBlock", "blocks_of"]

Series = list[Rational]


@dataclass(frozen=True, slots=True)
class KnownBlock:
    """One function: ``fields`` at 0, x, 1, infinity and the ``internal`` one, canonical Kac labels; ``series(n)`` are
    the first n coefficients."""

    name: str
    model: MinimalModel
    fields: tuple[Label, Label, Label, Label]
    internal: Label
    statement: str
    source: str
    series: Callable[[int], Series]


def _power(base: Sequence[Rational], exponent: Rational, length: int) -> Series:
    """A series with constant term 1 to a rational power."""
    return exponential([exponent * c for c in logarithmic_derivative(base, length)], length)


def _times(*factors: Sequence[Rational], length: int) -> Series:
    result: Series = [ONE]
    for factor in factors:
        result = series_product(result, factor, length)
    return result


def _polynomial(*coefficients: int | Rational) -> Series:
    return [Rational(c) if isinstance(c, int) else c for c in coefficients]


_GAP = _polynomial(1, -1)


def _gap(exponent: Rational | int, length: int) -> Series:
    """(1 - x)^exponent."""
    return _power(_GAP, Rational(exponent) if isinstance(exponent, int) else exponent, length)


def _hypergeometric(a: Rational, b: Rational, c: Rational, length: int) -> Series:
    terms = [ONE]
    for k in range(length - 1):
        terms.append(terms[-1] * (a + k) * (b + k) / ((c + k) * (k + 1)))
    return terms


# ---- Ising


def _spins_identity(length: int) -> Series:
    root = _gap(Rational(1, 2), length)
    half = [(1 + root[0]) / 2, *(c / 2 for c in root[1:])]
    return _times(_gap(Rational(-1, 8), length), _power(half, Rational(1, 2), length), length=length)


def _spins_energy(length: int) -> Series:
    root = _gap(Rational(1, 2), length + 1)
    slope = [-2 * c for c in root[1:]]
    return _times(_gap(Rational(-1, 8), length), _power(slope, Rational(1, 2), length), length=length)


def _fermions(length: int) -> Series:
    return _times(_polynomial(1, -1, 1), _gap(-1, length), length=length)


def _fermions_between_spins(length: int) -> Series:
    return _times(_polynomial(1, 1), _gap(-1, length), length=length)


def _fermions_and_spins(length: int) -> Series:
    return _times(_polynomial(1, Rational(-1, 2)), _gap(Rational(-1, 2), length), length=length)


# ---- Lee-Yang


def _lee_yang(a: int, b: int, c: int) -> Callable[[int], Series]:
    """(1 - x)^(1/5) 2F1(a/5, b/5; c/5; x)."""

    def series(length: int) -> Series:
        function = _hypergeometric(Rational(a, 5), Rational(b, 5), Rational(c, 5), length)
        return _times(_gap(Rational(1, 5), length), function, length=length)

    return series


# ---- tricritical Ising

_CHARGE = Rational(7, 10)


def _supercurrents(length: int) -> Series:
    first = _times(_polynomial(1, -3, 3, -1, 3, -3, 1), _gap(-3, length), length=length)
    second = _times([ZERO, ZERO, Rational(9, 2) / _CHARGE], _gap(-1, length), length=length)
    return [x + y for x, y in zip(first, second, strict=True)]


def _supercurrents_between(h: Rational) -> Callable[[int], Series]:
    """Two supercurrents between Ramond ground states of weight h: the term of x^n comes from G_n G_-n."""

    def series(length: int) -> Series:
        first = h - _CHARGE / 24
        return [ONE, *((2 * h + _CHARGE / 3 * (Rational(n * n) - Rational(1, 4))) / first for n in range(1, length))]

    return series


def _supercurrents_and_grounds(h: Rational) -> Callable[[int], Series]:
    """The same function at 1 - x, times x^3, divided by its value at 0: the two supercurrents stand at 0 and x."""

    def series(length: int) -> Series:
        third, eighth = _CHARGE / 3, _CHARGE / 12
        first = _times(_polynomial(2, -3, 1), [third], length=length)
        second = _times(_polynomial(0, 0, 1, -1), [2 * h - eighth], length=length)
        last = _times(_polynomial(0, 0, 0, 1), [h - _CHARGE / 24], length=length)
        whole = [(x + y + z) / (2 * third) for x, y, z in zip(first, second, last, strict=True)]
        return _times(whole, _gap(Rational(-3, 2), length), length=length)

    return series


_ISING, _LEE_YANG, _TRICRITICAL = MinimalModel.make(3, 4), MinimalModel.make(2, 5), MinimalModel.make(4, 5)
_ONE, _SPIN, _ENERGY = (1, 1), (1, 2), (1, 3)
_PHI = (1, 2)
_G, _SIGMA, _SIGMA_PRIME = (1, 4), (2, 2), (2, 1)
_BPZ = "A. Belavin, A. Polyakov, A. Zamolodchikov 1984"
_CARDY = f"J. Cardy 1985; {_BPZ}"
_FQS = "D. Friedan, Z. Qiu, S. Shenker 1985; M. Bershadsky, V. Knizhnik, M. Teitelman 1985"
_BETWEEN = "1 + sum over n >= 1 of (2h + (c/3)(n^2 - 1/4))/(h - c/24) x^n"
_ACROSS = "(1-x)^(-3/2) ((1-x)(2-x) c/3 + (2h - c/12) x^2 (1-x) + (h - c/24) x^3)/(2c/3)"


def _tricritical(name: str, ground: Label) -> tuple[KnownBlock, KnownBlock]:
    ground = _TRICRITICAL.canonical(ground)
    h = _TRICRITICAL.weight(ground)
    numbers = f"with c = {_CHARGE}, h = {h}"
    return (
        KnownBlock(
            f"tricritical Ising: two supercurrents between {name}",
            _TRICRITICAL,
            (ground, _G, _G, ground),
            ground,
            f"block = {_BETWEEN} {numbers}",
            _FQS,
            _supercurrents_between(h),
        ),
        KnownBlock(
            f"tricritical Ising: two supercurrents and {name}, identity channel",
            _TRICRITICAL,
            (_G, _G, ground, ground),
            _ONE,
            f"block = {_ACROSS} {numbers}",
            _FQS,
            _supercurrents_and_grounds(h),
        ),
    )


KNOWN_BLOCKS = (
    KnownBlock(
        "Ising: four spins, identity channel",
        _ISING,
        (_SPIN,) * 4,
        _ONE,
        "block = (1-x)^(-1/8) ((1 + sqrt(1-x))/2)^(1/2)",
        _BPZ,
        _spins_identity,
    ),
    KnownBlock(
        "Ising: four spins, energy channel",
        _ISING,
        (_SPIN,) * 4,
        _ENERGY,
        "block = (1-x)^(-1/8) (2 (1 - sqrt(1-x))/x)^(1/2)",
        _BPZ,
        _spins_energy,
    ),
    KnownBlock(
        "Ising: four energies",
        _ISING,
        (_ENERGY,) * 4,
        _ONE,
        "block = (1 - x + x^2)/(1-x), four free fermions",
        _BPZ,
        _fermions,
    ),
    KnownBlock(
        "Ising: two energies between spins",
        _ISING,
        (_SPIN, _ENERGY, _ENERGY, _SPIN),
        _SPIN,
        "block = (1 + x)/(1 - x), free fermions with integer modes",
        _BPZ,
        _fermions_between_spins,
    ),
    KnownBlock(
        "Ising: two energies and two spins, identity channel",
        _ISING,
        (_ENERGY, _ENERGY, _SPIN, _SPIN),
        _ONE,
        "block = (1 - x/2) (1-x)^(-1/2), free fermions with integer modes",
        _BPZ,
        _fermions_and_spins,
    ),
    KnownBlock(
        "Lee-Yang: identity channel",
        _LEE_YANG,
        (_PHI,) * 4,
        _ONE,
        "block = (1-x)^(1/5) 2F1(2/5, 3/5; 6/5; x)",
        _CARDY,
        _lee_yang(2, 3, 6),
    ),
    KnownBlock(
        "Lee-Yang: phi channel",
        _LEE_YANG,
        (_PHI,) * 4,
        _PHI,
        "block = (1-x)^(1/5) 2F1(1/5, 2/5; 4/5; x)",
        _CARDY,
        _lee_yang(1, 2, 4),
    ),
    KnownBlock(
        "tricritical Ising: four supercurrents",
        _TRICRITICAL,
        (_G,) * 4,
        _ONE,
        "block = (1 - 3x + 3x^2 - x^3 + 3x^4 - 3x^5 + x^6)/(1-x)^3 + 9 x^2/(2c (1-x)) with c = 7/10",
        _FQS,
        _supercurrents,
    ),
    *_tricritical("fields (2,2)", _SIGMA),
    *_tricritical("fields (2,1)", _SIGMA_PRIME),
)
"""All known blocks, each once; ``blocks_of`` finds them in the other orders of the fields as well."""


def blocks_of(point: FourPoint, order: int) -> Iterator[tuple[KnownBlock, Series]]:
    """Known blocks equal to that of ``point``, with its coefficients up to x^order; at most one is expected.

    Cost: order^2.

    >>> model = MinimalModel.make(3, 4)
    >>> point = FourPoint(model, ((1, 3), (1, 2), (1, 2), (1, 3)), (1, 2), ZERO)       # energies at 0 and infinity
    >>> [(known.name, series) for known, series in blocks_of(point, 3)]
    [('Ising: two energies between spins', [1, 9/8, 25/128, 123/1024])]
    """
    for known in KNOWN_BLOCKS:
        if known.model != point.model or known.internal != point.internal:
            continue
        for backwards, both, one in product((False, True), repeat=3):
            if _moved(known.fields, backwards, both, one) == point.fields:
                yield known, _moved_series(known, backwards, both, one, order + 1)
                break


def _moved(
    fields: tuple[Label, Label, Label, Label], backwards: bool, both: bool, one: bool
) -> tuple[Label, Label, Label, Label]:
    """The order of the fields after reversal, then both exchanges at once, then 1 <-> infinity alone."""
    a, b, c, d = fields
    if backwards:
        a, b, c, d = d, c, b, a
    if both:
        a, b, c, d = b, a, d, c
    if one:
        c, d = d, c
    return a, b, c, d


def _moved_series(known: KnownBlock, backwards: bool, both: bool, one: bool, length: int) -> Series:
    series = known.series(length)
    weight = known.model.weight
    if both:
        h0, hx, h1, h_inf = (weight(f) for f in _moved(known.fields, backwards, True, False))
        series = _times(_gap(h0 - hx - h1 + h_inf, length), series, length=length)
    if one:
        h0, hx, _, _ = (weight(f) for f in _moved(known.fields, backwards, both, True))
        inner = [ZERO, *(-ONE for _ in range(1, length))]
        exponent = h0 - hx - weight(known.internal)
        series = _times(_gap(exponent, length), composed(series, inner, length), length=length)
    return series
