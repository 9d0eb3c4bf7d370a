"""mixind chart"""

from __future__ import annotations

from typing import Any

import click

from mixind.cli import options, printing
from mixind.figures import PAPERS, write_chart
from mixind.prediction import predict
from mixind.quantities import pH_series


@click.command()
@click.argument("blend", metavar="BLEND")
@click.argument("out", metavar="OUT", type=click.Path())
@click.option("--ph", "span", default="4:10", show_default=True, metavar="FROM:TO[:STEP]", help="One rung per pH; or a list.")
@click.option("--paper", type=click.Choice(list(PAPERS)), default="a4", show_default=True, help="Size of the page.")
@options.date_option
@options.replace_option
@options.sample_options
@options.viewer_options
@options.library_option
def command(blend: str, out: str, span: str, paper: str, date: str | None, replace: bool, libraries: tuple[str, ...],
            **given: Any) -> None:
    """Draw the chart of BLEND into OUT (pdf, svg or png), true to size.

    Example: mixind chart examples/drip_line.toml drip_line.pdf --ph 4.5:7.5:0.5
    """
    pH = pH_series(span)
    read, conditions, remarks = options.blend_and_conditions(blend, libraries, given)
    write_chart(out, predict(read, pH, conditions), replace, date, paper)
    for text in remarks:
        printing.remark(text)
    printing.remark(f"{out}: print at 100 % size")
