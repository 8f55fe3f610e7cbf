"""The public names, all of them, and what a notebook needs to show their values; nothing is defined here.

``import ratomega`` gives the same names and reads this module when the first of them is asked for: worker processes and
the command line import what they use and no more.
"""

from ratomega.case.bundled import bundled_names
from ratomega.case.case import Case
from ratomega.case.reading import load_case
from ratomega.chain.averaging import average
from ratomega.chain.blocks import block
from ratomega.chain.explaining import Explanation, explain
from ratomega.chain.grids import grid
from ratomega.chain.pipeline import clusters, detect, limit, validate
from ratomega.desk.diagram_pictures import draw
from ratomega.desk.figures import plot, save_plot
from ratomega.desk.grid_csv import grid_csv
from ratomega.desk.notebook import register as _register
from ratomega.desk.report import Report, report
from ratomega.detector.atlas import Atlas, atlas
from ratomega.documents.results import load_result, to_json
from ratomega.errors import InputError, PathError, Problem, RatomegaError, WorkerError
from ratomega.exact.quadratic import Quadratic
from ratomega.exact.rational_function import RationalFunction
from ratomega.results.averages import Average, AverageResult
from ratomega.results.blocks import BlockCoefficient, BlockResult
from ratomega.results.detections import DetectResult
from ratomega.results.grids import GridResult, GridRow
from ratomega.results.limits import Coefficient, LimitResult
from ratomega.results.validations import ValidateResult
from ratomega.validator.verdict import Check, Kind, Verdict
from ratomega.verify.approach import Approach, approach
from ratomega.verify.comparing import CompareResult, compare

__all__ = [
    "Approach",
    "Atlas",
    "Average",
    "AverageResult",
    "BlockCoefficient",
    "BlockResult",
    "Case",
    "Check",
    "Coefficient",
    "CompareResult",
    "DetectResult",
    "Explanation",
    "GridResult",
    "GridRow",
    "InputError",
    "Kind",
    "LimitResult",
    "PathError",
    "Problem",
    "Quadratic",
    "RationalFunction",
    "RatomegaError",
    "Report",
    "ValidateResult",
    "Verdict",
    "WorkerError",
    "approach",
    "atlas",
    "average",
    "block",
    "bundled_names",
    "clusters",
    "compare",
    "detect",
    "draw",
    "explain",
    "grid",
    "grid_csv",
    "limit",
    "load_case",
    "load_result",
    "plot",
    "report",
    "save_plot",
    "to_json",
    "validate",
]

# How values show in a notebook is the desk's matter; see there.
_register()
