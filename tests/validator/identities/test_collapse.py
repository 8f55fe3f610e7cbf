"""Zeros and diagonal of a bifundamental: they hold by engine and plain sum, and an edge turned round fails."""

from __future__ import annotations

import plain
import pytest
from building import make_case, plain_values

import ratomega
from ratomega.case.setting import own_setting
from ratomega.validator.identities.collapse import check_collapse
from ratomega.validator.verdict import Kind, Verdict

ONE = {"coulomb": ["2/7"], "antifundamental": ["1/5"]}
OTHER = {"coulomb": ["-1/3"], "fundamental": ["3/11"], "antifundamental": ["5/9"]}
TWO = {"coulomb": ["2/7", "-1/5"], "antifundamental": ["1/5"]}
TOO = {"coulomb": ["3/13", "1/9"], "fundamental": ["4/7"]}


def engine(case):
    return [coefficient.value for coefficient in ratomega.limit(case, probes=0)]


def by_plain(case):
    values = plain_values(own_setting(case))
    return [plain.coefficient(values, charge) for charge in case.charges]


def turned(case):
    """The engine reads the edge the wrong way round."""
    if len(case.theory.nodes) == 1:
        return engine(case)
    back = ratomega.load_case(
        {
            "charge": list(case.charge),
            "background": {"eps1": str(case.background.eps1), "eps2": str(case.background.eps2)},
            "node": [
                {
                    "name": node.name,
                    "coulomb": [str(a) for a in node.coulomb],
                    "antifundamental": [str(m) for m in node.antifundamental],
                    "fundamental": [str(m) for m in node.fundamental],
                }
                for node in case.theory.nodes
            ],
            "edge": [
                {"from": case.theory.nodes[e.target].name, "to": case.theory.nodes[e.source].name, "mass": str(e.mass)}
                for e in case.theory.edges
            ],
        }
    )
    return engine(back)


@pytest.mark.parametrize("eps", [("1", "1"), ("1", "2"), ("2", "-3"), ("1", "-1"), ("7", "5")])
@pytest.mark.parametrize(
    ("nodes", "names"),
    [
        ([ONE, OTHER], ["zeros", "diagonal"]),
        ([TWO, ONE], ["zeros"]),
        ([ONE, TWO], ["zeros"]),
        ([TWO, TOO], ["zeros", "diagonal"]),
    ],
)
def test_zeros_and_diagonal_hold(eps, nodes, names):
    found = check_collapse(make_case(*eps, nodes, charge=2, edges=[(1, 2, "1/9")]), engine)
    assert [check.name for check in found] == [f"{name} of a bifundamental, edge n1 -> n2" for name in names]
    assert {check.verdict for check in found} == {Verdict.AGREES}
    assert [check.kind for check in found] == [Kind.SIBLING, Kind.CONSISTENCY][: len(names)]
    assert not any(check.complete for check in found)


def test_they_hold_for_the_plain_sum_at_a_generic_ratio():
    for nodes in ([ONE, OTHER], [ONE, TWO]):
        case = make_case("1", "103/71", nodes, charge=2, edges=[(1, 2, "1/9")])
        assert {check.verdict for check in check_collapse(case, by_plain)} == {Verdict.AGREES}


@pytest.mark.parametrize("nodes", [[ONE, OTHER], [TWO, ONE], [ONE, TWO], [TWO, TOO]])
def test_an_edge_turned_round_is_refuted(nodes):
    zeros, *_ = check_collapse(make_case("1", "1", nodes, charge=1, edges=[(1, 2, "1/9")]), turned)
    assert zeros.verdict is Verdict.REFUTED
    assert "and should be 0" in zeros.evidence


def test_a_wrong_diagonal_is_refuted():
    def off(case):
        return [value + (case.charges[n] == (2, 2)) for n, value in enumerate(engine(case))]

    zeros, diagonal = check_collapse(make_case("1", "1", [ONE, OTHER], charge=2, edges=[(1, 2, "1/9")]), off)
    assert (zeros.verdict, diagonal.verdict) == (Verdict.AGREES, Verdict.REFUTED)
    assert "first difference: Z_(2, 2)" in diagonal.evidence


def test_every_edge_has_its_own():
    nodes = [ONE, TWO, OTHER]
    found = check_collapse(make_case("1", "2", nodes, charge=1, edges=[(1, 2, "1/9"), (2, 3, "1/7")]), engine)
    assert [check.name[-8:] for check in found] == ["n1 -> n2", "n2 -> n3"]
    assert "n1 has more charge than n2" in found[0].evidence
    assert "n3 has more charge than n2" in found[1].evidence


def test_where_nothing_is_claimed():
    edges = [(1, 2, "1/9")]
    resonant = {"coulomb": ["1", "-1"]}
    level = {"coulomb": ["1/3", "1/3"]}
    assert check_collapse(make_case("1", "1", [resonant, ONE], charge=2, edges=edges), engine) == ()
    assert check_collapse(make_case("1", "1", [level, ONE], charge=2, edges=edges), engine) == ()
    assert check_collapse(make_case("1", "1", [ONE, OTHER], charge=0, edges=edges), engine) == ()
    assert check_collapse(make_case("1", "1", [ONE, OTHER], charge=2), engine) == ()


def test_work_is_bounded_before_it_starts():
    case = make_case("1", "1", [TWO, TOO], charge=3, edges=[(1, 2, "1/9")])
    asked = []

    def counting(one):
        asked.append(one)
        return engine(one)

    lowered = check_collapse(case, counting, most=100)
    assert all("up to charge 2 (of 3: more is too costly" in check.evidence for check in lowered)
    asked.clear()
    for check in check_collapse(case, counting, most=8):
        assert check.verdict is Verdict.UNDECIDED
        assert "ask for it with --depth full" in check.evidence
    assert asked == []
