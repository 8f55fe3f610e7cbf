"""``ratomega grid``: coefficients, or their partial sums, at many values of the free parameters."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import click

from ratomega.case.progression import split_axis
from ratomega.case.wording import quoted
from ratomega.chain.grids import grid as make_grid
from ratomega.cli.options import case_options
from ratomega.cli.running import finish, loaded_case
from ratomega.desk.grid_csv import grid_csv
from ratomega.errors import InputError

__all__ = ["grid"]


@click.command("grid", short_help="Give the coefficients at many values of the free parameters.")
@case_options
@click.option(
    "--at",
    "axes",
    multiple=True,
    metavar="VALUES",
    help="Values of a symbol: 'a = 0 to 2*i in 41', 'a = 0 to 3 by 1/8', 'a = 1/3, i/2'. Several make a product.",
)
@click.option("--nome", is_flag=True, help="H in the nome in place of Z: U(2) with four flavours or one adjoint.")
@click.option("--digits", type=int, metavar="D", help="Decimals with a radius in place of exact values.")
@click.option("--q", metavar="VALUE", help="Partial sums at this q, exact or such as '0.69 +/- 1e-4'; of H at 16 q_e.")
def grid(
    axes: Sequence[str],
    nome: bool,
    digits: int | None,
    q: str | None,
    as_json: bool,
    no_tilt: bool,
    most_configurations: int,
    **options_given: Any,
) -> int:
    """Give the coefficients at many values of the free parameters, as comma-separated values.

    CASE has symbols, such as a in coulomb = ["a", "-a"]; every one needs its values.

    Example: ratomega grid free-momentum --charge 2 --at "a = 0 to 2*i in 5"
    """
    at: dict[str, object] = {}
    for text in axes:
        name, values = split_axis(text)
        if name in at:
            raise InputError.single(f"values of {quoted(name)} are given twice", "at")
        at[name] = values
    result = make_grid(
        loaded_case(**options_given),
        at,
        nome=nome,
        digits=digits,
        q=q,
        allow_tilt=not no_tilt,
        most_configurations=most_configurations,
    )
    return finish(result, grid_csv, as_json, False)
