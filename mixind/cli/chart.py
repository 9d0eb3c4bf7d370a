"""mixind chart"""

from __future__ import annotations

from typing import Any

import click

from mixind.cli import options, printing
from mixind.figures import write_chart
from mixind.prediction import predict


@click.command()
@click.argument("blend", metavar="BLEND")
@click.argument("out", metavar="OUT", type=click.Path())
@options.span_option
@options.paper_option
@options.date_option
@options.replace_option
@options.sample_options
@options.viewer_options(several=False)
@options.library_option
def command(blend: str, out: str, span: str | None, paper: str, date: str | None, replace: bool, libraries: tuple[str, ...],
            **given: Any) -> None:
    """Draw the chart of BLEND into OUT (pdf, svg or png), true to size.

    Example: mixind chart examples/drip_line.toml drip_line.pdf --ph 4.5:7.5:0.5
    """
    read, conditions, remarks = options.blend_and_conditions(blend, libraries, given)
    prediction = predict(read, options.given_span(span, read), conditions)
    write_chart(out, prediction, replace, date, paper)
    for text in [*remarks, *printing.too_close(prediction)]:
        printing.remark(text)
    printing.remark(f"{out}: print at 100 % size")
