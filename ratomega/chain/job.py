"""A case made ready: read, checked for size and path, put on its own path, with the way in which it will be summed.

    case -> own path (tilted if need be) -> weights -> way

A case with symbols is put on its path at a generic point; beside what is found there, its coefficients are functions.
"""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping
from concurrent.futures import Executor
from dataclasses import dataclass, replace

from ratomega.case.affine import Affine
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.case.setting import MOST_PROBES, Setting, own_setting, probe_setting
from ratomega.chain.reports import charge_report
from ratomega.detector.accidents import check_path, dead_colours, frozen_number_warnings
from ratomega.detector.geometry import compact_by_parameters
from ratomega.diagrams.tuples import Charge, count_all
from ratomega.errors import InputError
from ratomega.exact.batches import here
from ratomega.exact.path import SMALL_PARAMETERS
from ratomega.exact.quadratic import Number
from ratomega.exact.rational import ZERO
from ratomega.regulator.limits import ChargeLimit, charge_limit
from ratomega.regulator.routes import ShortCut, Way, choose, point_values, short_cut
from ratomega.results.detections import ChargeReport
from ratomega.results.header import Header, PathRecord
from ratomega.symbolic.functions import Functions, SymbolicLimit
from ratomega.version import VERSION
from ratomega.weights import Weights
from ratomega.workers.charges import charge_cost, charge_limits, cut
from ratomega.workers.crew import Crew
from ratomega.workers.hands import Hands, LentExecutor, ThisProcess
from ratomega.workers.pool import OwnPool
from ratomega.workers.primes import prime_supplier
from ratomega.workers.store import Store

__all__ = ["MOST_CONFIGURATIONS", "CaseSource", "Found", "Job", "ShortLimit", "check_count"]

MOST_CONFIGURATIONS = 1_000_000
MOST_TERMS = 60
MOST_WORKERS = 1024

CaseSource = str | os.PathLike[str] | Mapping[str, object] | Case


@dataclass(frozen=True, slots=True)
class ShortLimit:
    """The limit at one charge by a short cut: no weight was looked at."""

    charge: Charge
    value: Number
    evidence: ShortCut


Found = ChargeLimit | SymbolicLimit | ShortLimit


@dataclass(frozen=True, slots=True)
class Job:
    """A case made ready: checked for size and path, put on its own path. Build it with ``Job.prepare``.

    ``sample`` is the case at numbers: the case itself, or at a generic point where it has symbols (then ``functions``).
    """

    case: Case
    sample: Case
    setting: Setting
    weights: Weights
    header: Header
    functions: Functions | None
    way: Way

    @classmethod
    def prepare(
        cls,
        source: CaseSource,
        *,
        allow_tilt: bool = True,
        most_configurations: int = MOST_CONFIGURATIONS,
        route: str = "auto",
        clusterwise: bool = False,
    ) -> Job:
        """Raises ``InputError`` when the case cannot be read, is too large, or has an unusable path.

        ``route`` and ``clusterwise`` as in ``regulator.routes.choose``.
        """
        case = load_case(source)
        if case.nested:
            message = (
                "u stands for a limit inside the limit, which limit and validate take; elsewhere there is one path, so "
                "give a multiple of t in place of u"
            )
            raise InputError.single(message, "u")
        functions = None
        if case.symbols:
            check_count(case, most_configurations)
            functions = Functions(case, most_configurations=most_configurations, evaluator=point_values)
        sample = case.at(**functions.generic_point) if functions is not None else case
        setting = own_setting(sample, allow_tilt=allow_tilt)
        way = choose(case, setting, route, clusterwise=clusterwise or functions is not None)
        if way.short_cut != "poles":
            check_count(case, most_configurations)
        check_path(setting, case.bounds)
        warnings = [*dead_colours(setting), *frozen_number_warnings(sample, setting)]
        if setting.tilted:
            names = ", ".join(name for name, _ in setting.tilts)
            warnings.insert(
                0,
                f"the Coulomb parameters of {names} were tilted, because a difference is an integer combination of "
                f"eps1 and eps2 all along the path: {setting.text()}; a tilt that is typed with u, such as 1 + u, goes "
                "to 0 first, before the background moves",
            )
        path = path_record(setting)
        if functions is not None:
            path = symbolic_path(case, setting)
            point = ", ".join(f"{name} = {value}" for name, value in functions.generic_point.items())
            warnings.append(f"weights, singular terms, orders and clusters are those at the generic point {point}")
        header = Header(VERSION, case, path, case.hash, tuple(warnings))
        return cls(case, sample, setting, Weights(setting), header, functions, way)

    def probes(self, number: int) -> tuple[Weights, ...]:
        """The weights on the first ``number`` further paths."""
        _check_probes(number)
        return tuple(Weights(probe_setting(self.sample, n)) for n in range(1, number + 1))

    def limits(
        self,
        *,
        probes: int,
        terms: int | None = None,
        always_probe: bool = False,
        crew: Crew | None = None,
        certify: bool = False,
    ) -> Iterator[Found]:
        """The limits charge by charge, to t^terms; computed here, or in chunks by a crew: they do not depend on which.

        A short cut gives all charges at once; ``certify`` makes it prove what it found.
        Raises ``InputError`` for terms of a case with symbols, or a crew for it.
        """
        last = checked_terms(terms)
        if self.functions is not None and terms is not None:
            message = "the expansion in t belongs to a case without symbols; give numbers for them"
            raise InputError.single(message, "terms")
        if self.functions is not None and crew is not None:
            message = "a case with symbols is not cut into parts for workers or a file of finished parts"
            raise InputError.single(message, "symbols")
        if self.way.short_cut and (terms is not None or always_probe):
            raise ValueError("this job was prepared for a short cut; prepare it with clusterwise=True")
        _check_probes(probes)
        needed = always_probe or not compact_by_parameters(self.setting, self.case.bounds)
        further = self.probes(probes if needed else 0)
        if self.way.short_cut:
            supplier = here if crew is None else prime_supplier(self.case, crew)
            done = short_cut(self.way, self.case, self.setting, certify=certify, supplier=supplier)
            for charge, value in zip(self.case.charges, done.values, strict=True):
                yield ShortLimit(charge, value, done)
            return
        if crew is not None:
            chunks = cut(self.case, self.setting, last=last, probes=probes, always_probe=always_probe)
            yield from charge_limits(self.setting, [p.setting for p in further], chunks, crew.results(chunks))
            return
        for charge in self.case.charges:
            one = charge_limit(self.weights, charge, further, last=last, always_probe=always_probe)
            yield one if self.functions is None else SymbolicLimit(one, self.functions.at(charge))

    def cost(self, charge: Charge) -> float:
        """About how long one charge takes on one path, in seconds of some machine: for estimates of what is left."""
        return charge_cost(self.case.theory, charge)

    def scans(self, *, exchanges: int = 0) -> Iterator[ChargeReport]:
        """The detector's reports charge by charge; exchange edges in clusters of at most ``exchanges`` members."""
        for charge in self.case.charges:
            yield charge_report(self.weights, charge, exchanges=exchanges)

    def crew(
        self,
        *,
        workers: int | None = None,
        executor: Executor | LentExecutor | None = None,
        keep: str | os.PathLike[str] | None = None,
    ) -> Crew | None:
        """Who does the work, by the options of ``limit``; None when it is done here and nothing is kept."""
        if workers is not None and not (_is_whole(workers) and 1 <= workers <= MOST_WORKERS):
            raise InputError.single(f"the number of workers is between 1 and {MOST_WORKERS}, not {workers}", "workers")
        if executor is not None and not isinstance(executor, (Executor, LentExecutor)):
            message = f"an executor is a concurrent.futures.Executor, not {type(executor).__name__}"
            raise InputError.single(message, "executor")
        if workers is None and executor is None and keep is None:
            return None
        store = None if keep is None else Store.open(keep, self.case)
        hands: Hands
        if isinstance(executor, LentExecutor):
            hands = executor
        elif executor is not None:
            hands = LentExecutor(executor, None if workers is None else lambda: workers)
        else:
            hands = ThisProcess() if workers is None else OwnPool(workers)
        return Crew(hands, store)


def _check_probes(number: int) -> None:
    if not 0 <= number <= MOST_PROBES:
        message = f"the number of further paths is between 0 and {MOST_PROBES}, not {number}"
        raise InputError.single(message, "probes")


def check_count(case: Case, most: int) -> None:
    """Raises ``InputError`` when the case has more configurations than ``most``."""
    count = count_all(case.theory.ranks, case.charge)
    if count > most:
        raise InputError.single(
            f"{count} configurations up to this charge, more than the limit of {most}; "
            "lower the charge or raise the limit (--most-configurations, most_configurations=)",
            "charge",
        )


def _is_whole(value: object) -> bool:
    return isinstance(value, int) and not isinstance(value, bool)


def path_record(setting: Setting) -> PathRecord:
    coulomb = tuple((node.name, tuple(str(a) for a in node.coulomb)) for node in setting.nodes)
    return PathRecord(SMALL_PARAMETERS, str(setting.eps1), str(setting.eps2), coulomb, setting.tilted)


def symbolic_path(case: Case, setting: Setting) -> PathRecord:
    """The path of a case with symbols; ``setting`` is the same path at the generic point."""
    tilts = dict(setting.tilts)
    coulomb = []
    for node in case.theory.nodes:
        texts = []
        for a, tilt in zip(node.coulomb, tilts.get(node.name, (ZERO,) * node.rank), strict=True):
            on_path = replace(a, symbols=()).on(setting.eps1, setting.eps2)
            texts.append(str(Affine(on_path.constant, t=on_path.slope + tilt, symbols=a.symbols)))
        coulomb.append((node.name, tuple(texts)))
    return PathRecord(SMALL_PARAMETERS, str(setting.eps1), str(setting.eps2), tuple(coulomb), setting.tilted)


def checked_terms(terms: int | None) -> int:
    if terms is None:
        return 0
    if not 0 <= terms <= MOST_TERMS:
        raise InputError.single(f"the last power of t is between 0 and {MOST_TERMS}, not {terms}", "terms")
    return terms
