"""The option ``--plot FILE`` of the commands whose result has a picture."""

from __future__ import annotations

import click

from ratomega.cli.completion import FILE
from ratomega.desk.figures import check_plot_file, plot, save_plot
from ratomega.detector.atlas import Atlas
from ratomega.results.detections import DetectResult
from ratomega.verify.approach import Approach

__all__ = ["plot_option", "write_plot"]


def _checked(_context: click.Context, _option: click.Parameter, file: str | None) -> str | None:
    """Before anything is computed."""
    if file is not None:
        check_plot_file(file)
    return file


plot_option = click.option(
    "--plot",
    type=FILE,
    metavar="FILE",
    callback=_checked,
    help="Also draw it to FILE, which ends in .svg or .png.",
)


def write_plot(result: DetectResult | Atlas | Approach, file: str | None) -> None:
    """Draw the result to the file; nothing where none was asked for."""
    if file is not None:
        save_plot(plot(result), file)
