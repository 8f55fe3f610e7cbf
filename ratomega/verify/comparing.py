"""From a case and a table to a result: exact limits -> rows -> diagnosis."""

from __future__ import annotations

from dataclasses import dataclass, replace

from ratomega.case.case import Case
from ratomega.case.reading import CaseSource, load_case
from ratomega.chain.job import MOST_CONFIGURATIONS, Job
from ratomega.chain.pipeline import limit_result
from ratomega.diagrams.tuples import Charge, configurations, count_all, count_configurations
from ratomega.errors import InputError, Problem, RatomegaError
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import Rational
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.header import Header
from ratomega.verify.diagnosis import diagnose
from ratomega.verify.explanation import Explanation
from ratomega.verify.given import Given
from ratomega.verify.precision_loss import rounding
from ratomega.verify.quantities import Quantity, quantities
from ratomega.verify.question import Question
from ratomega.verify.rows import Row, compared, real_value
from ratomega.verify.series import Series, below
from ratomega.verify.source import Source
from ratomega.verify.table import NumbersSource, read_table

__all__ = ["CompareResult", "compare"]

# The diagnosis sums the configurations of a row many times over; rows beyond this are compared and not diagnosed from.
MOST_DIAGNOSED = 2000
# Rounding errors are added up from every weight at and below a charge; beyond so many a row stands as it was given.
MOST_ROUNDED = 20_000
ROUNDING_AT_MOST = Rational(1, 10**8)


class _NotRealError(RatomegaError):
    """An exact value is not real by this reading."""


@dataclass(frozen=True, slots=True)
class CompareResult:
    """Row by row, then what explains the rows. ``quantity`` is what the numbers are compared with as coefficients of.

    ``used`` is how many rows the diagnosis was made from.
    """

    header: Header
    quantity: str
    rows: tuple[Row, ...]
    diagnosis: tuple[Explanation, ...]
    used: int
    partial: bool = False

    @property
    def agree(self) -> bool:
        return all(row.agrees for row in self.rows)

    @property
    def exit_status(self) -> int:
        """0 when all rows agree, else 1."""
        return 0 if self.agree else 1


def compare(
    case: CaseSource, numbers: NumbersSource, *, as_: str | None = None, most_configurations: int = MOST_CONFIGURATIONS
) -> CompareResult:
    """Someone's numbers against the exact limits, with a diagnosis where they differ.

    ``numbers`` is a CSV or JSON file, a JSON text, a mapping from charges to values or a list of rows (``verify.table``
    says how they look). ``as_`` says what they are: "z", "log", "prepotential" (-eps1 eps2 log Z) or "block"; without
    it each that is real is tried, and the first that all rows agree with is taken, or else the one that most rows
    agree with, where half of them do.

    Raises ``InputError`` for a bad table (row and column named), a case with symbols or with u, a row whose charge
    has no finite limit, and exact values that are not real. Cost: the exact limits, and where rows deviate some
    thousand sums at low charges.

    >>> case = {"charge": 1, "background": {"eps1": 1, "eps2": 1}, "node": [{"coulomb": [0]}]}
    >>> compare(case, {1: "1.00", 2: "0.50", 3: "0.17"}).agree            # exp(q)
    True
    >>> [one.changes for one in compare(case, {1: "-1.0000", 2: "0.5000", 3: "-0.1667"}, as_="z").diagnosis][0]
    ('q -> -q',)
    """
    loaded = load_case(case)
    if loaded.symbols:
        message = f"numbers are compared with numbers; give values for {', '.join(loaded.symbols)}"
        raise InputError.single(message, "symbols")
    table = read_table(numbers, [node.name for node in loaded.theory.nodes])
    job = Job.prepare(_covering(loaded, table), most_configurations=most_configurations)
    chosen = quantities(as_, job.setting)
    result = limit_result(job, list(job.limits(probes=1)))
    z = _exact_series(result.coefficients, table)
    source = Source(job.setting)
    found = _readings(table, chosen, z, source)
    for quantity, rows in found.items():
        if all(row.agrees for row in rows):
            return CompareResult(result.header, quantity.name, rows, (), 0)
    likely = _likely(found, table)
    used = _affordable(table, job.setting.ranks)
    explanations = _diagnosis(job, source, table, used, likely)
    best = explanations[0].quantity
    shown = next(rows for one, rows in likely.items() if one.name == best)
    return CompareResult(result.header, best, shown, explanations, len(used))


def _readings(
    table: tuple[Given, ...], chosen: tuple[Quantity, ...], z: Series, source: Source
) -> dict[Quantity, tuple[Row, ...]]:
    """The rows by every reading that is real. Raises ``InputError`` where none is: tables hold real numbers."""
    found = {}
    refused = []
    for one in chosen:
        try:
            found[one] = _rows(table, one, one.of(z, source.setting), source)
        except _NotRealError as error:
            refused.append(error)
    if not found:
        raise InputError.single(str(refused[0]), "case")
    return found


def _likely(found: dict[Quantity, tuple[Row, ...]], table: tuple[Given, ...]) -> dict[Quantity, tuple[Row, ...]]:
    """What the numbers are, where the rows say it: the readings that most rows agree with, half of them at least.

    A zero says nothing: log Z of a short series and Z with most terms left out have many. Otherwise every reading.
    """
    telling = [n for n, given in enumerate(table) if given.value != 0]
    count = {one: sum(1 for n in telling if rows[n].agrees) for one, rows in found.items()}
    most = max(count.values())
    if 2 * most < len(telling):
        return found
    return {one: rows for one, rows in found.items() if count[one] == most}


def _covering(case: Case, table: tuple[Given, ...]) -> Case:
    """The case up to the charges of the table: by node or by total charge, whichever is less work."""
    nodes = len(case.theory.nodes)
    bounds = [max(row.charge[v] for row in table) for v in range(nodes)]
    whole = max(sum(row.charge) for row in table)
    if nodes == 1:
        return case.with_charge(whole)
    ranks = case.theory.ranks
    by_node = case.with_charge(bounds)
    by_total = case.with_charge(whole)
    return by_node if count_all(ranks, bounds) <= count_all(ranks, whole) else by_total


def _exact_series(coefficients: object, table: tuple[Given, ...]) -> Series:
    assert isinstance(coefficients, tuple)
    needed = {j for row in table for j in below(row.charge)}
    known: dict[Charge, Number] = {}
    problems = []
    for one in coefficients:
        if one.charge not in needed:
            continue
        if one.status != "finite" or one.value is None or isinstance(one.value, RationalFunction):
            shown = ",".join(str(k) for k in one.charge)
            what = "a pole survives" if one.status == "pole" else "the limit depends on the path"
            problems.append(Problem(f"{what} at charge {shown}, so there is no number to compare with", "case"))
        else:
            known[one.charge] = one.value
    if problems:
        raise InputError(problems)
    return known.__getitem__


def _rows(table: tuple[Given, ...], quantity: Quantity, series: Series, source: Source) -> tuple[Row, ...]:
    """Raises ``_NotRealError`` where an exact value is not real."""
    rows = []
    for given in table:
        exact = series(given.charge)
        real = real_value(exact)
        if real is None:
            shown = ",".join(str(k) for k in given.charge)
            message = f"the exact value at charge {shown} is not real, and a table holds real numbers"
            raise _NotRealError(message)
        row = compared(given, exact, real)
        if not row.agrees and given.double and _may_be_rounding(given, real):
            row = compared(_with_rounding(given, quantity, source), exact, real)
        rows.append(row)
    return tuple(rows)


def _may_be_rounding(given: Given, real: Rational) -> bool:
    """Worth looking at: a number of double precision that is off in its last half."""
    return bool(abs(given.value - real) <= ROUNDING_AT_MOST * (1 + abs(real)))


def _with_rounding(given: Given, quantity: Quantity, source: Source) -> Given:
    """The number with the rounding errors of a sum in double precision allowed, where nothing is singular."""
    ranks = source.setting.ranks
    if count_all(ranks, given.charge) > MOST_ROUNDED:
        return given
    regular = all(
        source.weights.weight(c).vanishing_denominators == 0
        for j in below(given.charge)
        for c in configurations(ranks, j)
    )
    if source.weights.radicand or not regular:
        return given
    allowed = Rational(*rounding(source, quantity, given.charge).as_integer_ratio())
    return replace(given, tolerance=max(given.tolerance, allowed))


def _affordable(table: tuple[Given, ...], ranks: tuple[int, ...]) -> tuple[Given, ...]:
    """The rows that the diagnosis is made from, cheapest first."""
    costs = {row.charge: count_configurations(ranks, row.charge) for row in table}
    rows = sorted(table, key=lambda row: (costs[row.charge], sum(row.charge), row.charge))
    kept: list[Given] = []
    total = 0
    for row in rows:
        total += costs[row.charge]
        if total > MOST_DIAGNOSED:
            break
        kept.append(row)
    return tuple(kept)


def _diagnosis(
    job: Job,
    source: Source,
    table: tuple[Given, ...],
    used: tuple[Given, ...],
    found: dict[Quantity, tuple[Row, ...]],
) -> tuple[Explanation, ...]:
    questions: list[Question] = []
    whole: list[Question] = []
    for quantity, rows in found.items():
        tolerances = {row.charge: row.tolerance for row in rows}
        exact: dict[Charge, Rational] = {}
        for row in rows:
            real = real_value(row.exact)
            assert real is not None
            exact[row.charge] = real

        def ask(
            chosen: tuple[Given, ...],
            quantity: Quantity = quantity,
            tolerances: dict[Charge, Rational] = tolerances,
            exact: dict[Charge, Rational] = exact,
        ) -> Question:
            allowed = tuple(replace(row, tolerance=tolerances[row.charge]) for row in chosen)
            values = tuple(exact[row.charge] for row in chosen)
            return Question(job.case, job.setting, source, quantity, allowed, values)

        question = ask(used)
        if all(question.exact != other.exact for other in questions):
            questions.append(question)
            whole.append(ask(table))
    return diagnose(questions, whole)
