"""A case: theory + background + charge bound, with its canonical hash."""

from __future__ import annotations

import hashlib
import json
import keyword
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from ratomega.case.affine import Affine
from ratomega.case.background import Background
from ratomega.case.expression import IMAGINARY, INNER, ROOT, SYMBOLS, as_affine
from ratomega.case.theory import Theory
from ratomega.case.wording import kind, quoted, shortened
from ratomega.diagrams.tuples import Charge, charges_up_to
from ratomega.errors import InputError, Problem
from ratomega.exact.path import Linear
from ratomega.exact.quadratic import is_quadratic, two_fields
from ratomega.exact.rational import Rational, exact_text

__all__ = ["HIGHEST_CHARGE", "Case"]

# A first bound on what is read: counting the configurations costs charge^2, so the exact count comes after this.
HIGHEST_CHARGE = 500
LONGEST_TITLE = 200
MOST_SYMBOLS = 3

_NAME = re.compile(r"[A-Za-z_][A-Za-z0-9_]{0,31}")


@dataclass(frozen=True, slots=True)
class Case:
    """One job. ``charge`` is an integer (bound on the total charge) or one bound per node."""

    title: str
    theory: Theory
    background: Background
    charge: int | tuple[int, ...]
    symbols: tuple[str, ...] = ()

    @classmethod
    def make(
        cls,
        theory: Theory,
        background: Background,
        charge: int | Sequence[int],
        title: str = "",
        symbols: Sequence[str] = (),
    ) -> Case:
        """The checking constructor. Raises ``InputError`` for a bad charge, title or symbol, or for numbers of two
        fields.
        """
        symbols = checked_symbols(symbols)
        _check_field(theory, symbols)
        return cls(checked_title(title), theory, background, checked_charge(charge, len(theory.nodes)), symbols)

    def with_charge(self, charge: int | Sequence[int]) -> Case:
        return replace(self, charge=checked_charge(charge, len(self.theory.nodes)))

    def at(self, **values: object) -> Case:
        """The case with symbols set to values: exact numbers, or expressions in eps1, eps2, t and the other symbols.

        A typed number stays fixed while the background moves, like the symbol itself. Raises ``InputError`` for an
        unknown symbol.
        """
        rest = tuple(name for name in self.symbols if name not in values)
        read: dict[str, Affine] = {}
        for name, value in values.items():
            if name not in self.symbols:
                known = ", ".join(self.symbols) or "none"
                raise InputError.single(f"there is no symbol {quoted(name)}; the symbols are {known}", "symbols")
            read[name] = as_affine(value, symbols=(*SYMBOLS, *rest), where=name)
        return Case.make(self.theory.at(read), self.background, self.charge, self.title, rest)

    @property
    def nested(self) -> bool:
        """u occurs: a limit inside the limit, u -> 0 before t -> 0."""
        parameters = (x for _, x in self.theory.parameters())
        return any(u != 0 for u in self.background.inner) or any(x.coefficient(INNER) != 0 for x in parameters)

    def inner(self, value: Rational) -> Case:
        """The case of the inner limit at t = ``value``: t a number, and u the parameter of the path, called t."""

        def forms(e: Linear, u: Rational) -> Linear:
            return Linear(e.constant + e.slope * value, u)

        def change(x: Affine) -> Affine:
            return Affine(x.constant + x.t * value, x.eps1, x.eps2, x.coefficient(INNER))

        background, (u1, u2) = self.background, self.background.inner
        moved = Background(forms(background.eps1, u1), forms(background.eps2, u2))
        return replace(self, theory=self.theory.each(change), background=moved)

    @property
    def charges(self) -> tuple[Charge, ...]:
        """Every charge within the bound, charge 0 first."""
        return charges_up_to(self.charge, len(self.theory.nodes))

    @property
    def bounds(self) -> tuple[int, ...]:
        """The highest charge of every node."""
        return (self.charge,) * len(self.theory.nodes) if isinstance(self.charge, int) else self.charge

    def key(self) -> str:
        """The physics alone as canonical text: no title, no charge, no names."""
        eps = [[str(x.constant), str(x.slope)] for x in (self.background.eps1, self.background.eps2)]
        if any(u != 0 for u in self.background.inner):
            eps += [[str(u) for u in self.background.inner]]
        symbols = [sorted(self.symbols)] if self.symbols else []
        return json.dumps([eps, self.theory.key(), *symbols], separators=(",", ":"))

    @property
    def hash(self) -> str:
        """SHA-256 of ``key``, the first 16 hexadecimal digits."""
        return hashlib.sha256(self.key().encode()).hexdigest()[:16]


def checked_symbols(symbols: Sequence[str]) -> tuple[str, ...]:
    """``symbols`` when they are different usable names, few enough; ``InputError`` with every mistake otherwise."""
    if len(symbols) > MOST_SYMBOLS:
        raise InputError.single(f"a case has at most {MOST_SYMBOLS} symbols, not {len(symbols)}", "symbols")
    problems = []
    for number, name in enumerate(symbols, 1):
        if not isinstance(name, str):
            message = f"a symbol is a name in quotes, not {kind(name)}"
        elif not _NAME.fullmatch(name) or keyword.iskeyword(name):
            message = f"the symbol {quoted(name)} is not a name of letters, digits and _ such as a or m_1"
        elif name in (*SYMBOLS, INNER, IMAGINARY, ROOT):
            message = f"the name {name} has its own meaning; choose another symbol"
        elif name in symbols[: number - 1]:
            message = f"the symbol {name} is listed twice"
        else:
            continue
        problems.append(Problem(message, f"symbols[{number}]"))
    if problems:
        raise InputError(problems)
    return tuple(symbols)


def _check_field(theory: Theory, symbols: Sequence[str]) -> None:
    """Refuse the first parameter that leaves the quadratic field of those before it, or has an unknown symbol."""
    field = 0
    for where, parameter in theory.parameters():
        for name, _ in parameter.symbols:
            if name == INNER and symbols:
                raise InputError.single(f"{parameter} contains u; a limit inside the limit takes no symbols", where)
            if name not in (*symbols, INNER):
                raise InputError.single(f"{parameter} contains {name}, which is not among the symbols", where)
        for d in {x.d for x in parameter.numbers() if is_quadratic(x)}:
            if field not in (0, d):
                raise InputError.single(two_fields(field, d), where)
            field = d


def checked_title(title: str) -> str:
    """``title`` when it is one printable line of bounded length; ``InputError`` otherwise."""
    if len(title) > LONGEST_TITLE or not title.isprintable():
        message = f"the title {quoted(title)} is not one line of at most {LONGEST_TITLE} printable characters"
        raise InputError.single(message, "title")
    return title


def checked_charge(charge: object, nodes: int) -> int | tuple[int, ...]:
    """``charge`` as an integer or a tuple with one bound per node; ``InputError`` otherwise."""
    if isinstance(charge, Sequence) and not isinstance(charge, (str, bytes)):
        if len(charge) != nodes:
            message = f"a list of charges gives one bound per node: {nodes} expected, {len(charge)} given"
            raise InputError.single(message, "charge")
        bounds = tuple(charge)
        mistakes = [(_charge_mistake(bound), f"charge[{number}]") for number, bound in enumerate(bounds, 1)]
        problems = [Problem(message, where) for message, where in mistakes if message]
        if problems:
            raise InputError(problems)
        return bounds
    if message := _charge_mistake(charge):
        raise InputError.single(message, "charge")
    assert isinstance(charge, int)
    return charge


def _charge_mistake(bound: object) -> str:
    if not isinstance(bound, int) or isinstance(bound, bool):
        return f"a charge is an integer, or a list with one integer per node, not {kind(bound)}"
    if bound < 0:
        return f"a charge is zero or more, not {shortened(exact_text(Rational(bound)))}"
    if bound > HIGHEST_CHARGE:
        return f"the charge {shortened(exact_text(Rational(bound)))} is beyond {HIGHEST_CHARGE}"
    return ""
