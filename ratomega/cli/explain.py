"""The command ``ratomega explain``."""

from __future__ import annotations

from typing import Any

import click

from ratomega.chain.explaining import explain as explain_case
from ratomega.cli.options import case_options
from ratomega.cli.running import finish, loaded_case
from ratomega.desk.explain_text import explain_text

__all__ = ["explain"]


@click.command("explain", short_help="Say in words what is singular, why, and what cancels it.")
@case_options
def explain(as_json: bool, no_tilt: bool, most_configurations: int, **options_given: Any) -> int:
    """Say in words what is singular, why, what cancels it, and what the limit means.

    Example: ratomega explain b1-four-flavours --charge 2
    """
    loaded = loaded_case(**options_given)
    result = explain_case(loaded, allow_tilt=not no_tilt, most_configurations=most_configurations)
    return finish(result, explain_text, as_json, False)
