"""Sums and residues as text and back, exactly: how the results of chunks travel and are kept.

Numbers are "num/den", residues unsigned integers of four bytes in base 64; everything else is JSON integers and lists.
Reading checks every part and raises ``ValueError``: a text may come from a file that somebody else wrote.
"""

from __future__ import annotations

import base64
import binascii
import json
from collections.abc import Sequence
from dataclasses import replace
from math import prod
from typing import TypeGuard

import numpy as np

from ratomega.case.case import Case
from ratomega.case.reading import case_from_mapping, case_to_mapping
from ratomega.diagrams.tuples import Charge
from ratomega.exact.batches import Batch
from ratomega.exact.laurent import Laurent
from ratomega.exact.quadratic import from_number_text, number_text
from ratomega.regulator.direct import ChargeSum, ClusterSum
from ratomega.weights import ContentsKey

__all__ = [
    "batch_data",
    "batch_from",
    "canonical_text",
    "case_from",
    "read_list",
    "series_data",
    "series_from",
    "sum_data",
    "sum_from",
    "written",
]


def written(data: object) -> str:
    """Canonical JSON text.

    >>> written([1, None, ["1/2"]])
    '[1,null,["1/2"]]'
    """
    return json.dumps(data, separators=(",", ":"))


def canonical_text(case: Case) -> str:
    """What a chunk says of its case. Title and charge are left out: chunks say of themselves how far they go."""
    return written(case_to_mapping(replace(case, title="", charge=0)))


def case_from(text: str) -> Case:
    """The case of a chunk, of charge 0."""
    return case_from_mapping(json.loads(text))


def read_list(text: str) -> list[object]:
    """The list that ``written`` wrote. Raises ``ValueError``."""
    try:
        data = json.loads(text)
    except RecursionError as error:
        raise ValueError("the text nests too deeply") from error
    return _list(data)


def series_data(series: Laurent) -> list[object]:
    """A Laurent series as valuation, precision and coefficients from the first that is not zero.

    >>> series_data(Laurent.from_coefficients(-1, [1, 0, 2], precision=3))
    [-1, 3, ['1', '0', '2']]
    """
    return [series.valuation, series.precision, [number_text(c) for c in series.poly.coeffs()]]


def series_from(data: object) -> Laurent:
    """Read back what ``series_data`` gave.

    >>> series_from([-1, 3, ["1", "0", "2"]]).coefficients()
    {-1: 1, 1: 2}
    """
    valuation, precision, coefficients = _items(data, 3)
    numbers = [from_number_text(_text(c)) for c in _list(coefficients)]
    series = Laurent.from_coefficients(_whole(valuation), numbers, precision=_whole(precision))
    if series_data(series) != data:
        raise ValueError("a series is not in its canonical form")
    return series


def sum_data(one: ChargeSum) -> list[object]:
    """The sum at one charge, or a part of it, with its clusters in their order; the charge itself is left out."""
    clusters = [
        [key, c.size, c.order, c.lowest_order, c.singular_members, c.has_sink, series_data(c.series)]
        for key, c in one.clusters.items()
    ]
    counts = [one.configurations, one.singular, one.indeterminate, one.worst_order]
    return [*counts, series_data(one.series), clusters]


def sum_from(data: object, charge: Charge) -> ChargeSum:
    """Read back what ``sum_data`` gave."""
    configurations, singular, indeterminate, worst, series, clusters = _items(data, 6)
    found: dict[ContentsKey, ClusterSum] = {}
    for entry in _list(clusters):
        key, size, order, lowest, members, sink, own = _items(entry, 7)
        contents = tuple(_node_contents(node) for node in _list(key))
        if sink is not None and not isinstance(sink, bool):
            raise ValueError("a cluster has a sink, has none, or was not asked")
        found[contents] = ClusterSum(
            _whole(size), _whole(order), _whole(lowest), _whole(members), sink, series_from(own)
        )
    counts = (_whole(configurations), _whole(singular), _whole(indeterminate), _whole(worst))
    return ChargeSum(charge, series_from(series), found, *counts)


def batch_data(batch: Batch) -> list[object]:
    """A batch of residues: the bad primes, and the residues from 0 to p - 1 modulo the others, prime after prime.

    >>> batch_data(Batch((101,), (103,), np.array([[-1.0, 2.0]])))
    [[103], 'ZAAAAAIAAAA=']
    """
    moduli = np.array(batch.primes, dtype=np.int64).reshape(-1, *(1,) * (batch.values.ndim - 1))
    residues = np.mod(batch.values.astype(np.int64), moduli).astype("<u4")
    return [list(batch.bad), base64.b64encode(residues.tobytes()).decode("ascii")]


def batch_from(data: object, primes: Sequence[int], shape: tuple[int, ...]) -> Batch:
    """Read back what ``batch_data`` gave for a batch of these primes, with residues of this shape for each.

    >>> batch_from([[103], "ZAAAAAIAAAA="], (101, 103), (2,)).values
    array([[100.,   2.]])
    """
    left_out, encoded = _items(data, 2)
    bad = tuple(_whole(p) for p in _list(left_out))
    if bad != tuple(p for p in primes if p in bad):
        raise ValueError("the bad primes are not among those that were asked, in their order")
    good = tuple(p for p in primes if p not in bad)
    try:
        raw = base64.b64decode(_text(encoded).encode("ascii"), validate=True)
    except (binascii.Error, UnicodeEncodeError) as error:
        raise ValueError("the residues are not in base 64") from error
    if len(raw) != 4 * len(good) * prod(shape):
        raise ValueError(f"{4 * len(good) * prod(shape)} bytes of residues are expected, not {len(raw)}")
    residues = np.frombuffer(raw, dtype="<u4").reshape(len(good), *shape)
    if (residues >= np.array(good, dtype=np.int64).reshape(-1, *(1,) * len(shape))).any():
        raise ValueError("a residue is not smaller than its prime")
    return Batch(good, bad, residues.astype(np.float64))


def _node_contents(value: object) -> tuple[int, ...] | tuple[tuple[int, int], ...]:
    """The contents of one node: integers, or pairs of them beyond Q."""
    items = _list(value)
    if items and _is_list(items[0]):
        pairs = [_items(item, 2) for item in items]
        return tuple((_whole(x), _whole(y)) for x, y in pairs)
    return tuple(_whole(item) for item in items)


def _is_list(value: object) -> TypeGuard[list[object]]:
    return isinstance(value, list)


def _list(value: object) -> list[object]:
    if not _is_list(value):
        raise ValueError("a list is expected")
    return value


def _items(value: object, number: int) -> Sequence[object]:
    items = _list(value)
    if len(items) != number:
        raise ValueError(f"a list of {number} entries is expected, not of {len(items)}")
    return items


def _whole(value: object) -> int:
    if not isinstance(value, int) or isinstance(value, bool):
        raise ValueError("an integer is expected")
    return value


def _text(value: object) -> str:
    if not isinstance(value, str):
        raise ValueError("a text is expected")
    return value
