"""What the identities are given in the tests: limits by the engine or by the plain reference, sound or spoilt."""

from __future__ import annotations

import plain
from building import plain_values

import ratomega
from ratomega.case.setting import own_setting
from ratomega.chain.job import Job
from ratomega.diagrams.tuples import count_all
from ratomega.validator.identities.siblings import is_smooth


def engine(case):
    """The limits by the engine. Siblings must be what was promised: one node, compact, an integer charge."""
    assert isinstance(case.charge, int)
    assert len(case.theory.nodes) == 1
    assert is_smooth(case)
    return [coefficient.value for coefficient in ratomega.limit(case, probes=0)]


def clusterwise(case):
    """The limits cluster by cluster."""
    return list(Job.prepare(case, clusterwise=True).limits(probes=0))


def by_plain(case):
    """Where no denominator vanishes: the plain sum over configurations."""
    values = plain_values(own_setting(case))
    return [plain.coefficient(values, (k,)) for k in range(case.charge + 1)]


class Counting:
    """Limits by ``evaluate``, and how many configurations were asked for; with ``spoil``, values are changed."""

    def __init__(self, evaluate=engine, spoil=None):
        self.evaluate, self.spoil = evaluate, spoil
        self.cases = []

    def __call__(self, case):
        self.cases.append(case)
        values = list(self.evaluate(case))
        return values if self.spoil is None else self.spoil(case, values)

    @property
    def configurations(self):
        return sum(count_all(case.theory.ranks, case.charge) for case in self.cases)


def last_sign(case, values):
    """The sign of the last coefficient is changed."""
    return [*values[:-1], -values[-1]] if len(values) > 1 else values


def other_ratio(case, values):
    """The values belong to another background: a path exchanged."""
    moved = ratomega.load_case(
        {
            "charge": case.charge,
            "background": {"eps1": str(case.background.eps1.constant), "eps2": "17/11"},
            "node": [
                {
                    "coulomb": [str(a) for a in node.coulomb],
                    "antifundamental": [str(m) for m in node.antifundamental],
                    "fundamental": [str(m) for m in node.fundamental],
                    "adjoint": [str(m) for m in node.adjoint],
                }
                for node in case.theory.nodes
            ],
        }
    )
    return engine(moved)


def first_off(case, values):
    """One configuration of charge 1 is dropped: Z_1 is off by a little."""
    return [values[0], values[1] + 1, *values[2:]] if len(values) > 1 else values


FAULTS = [last_sign, other_ratio, first_off]
