"""mixind predict"""

from __future__ import annotations

from typing import Any

import click

from mixind.cli import options, printing
from mixind.difference import METRICS
from mixind.prediction import predict
from mixind.version import VERSION


@click.command()
@click.argument("blend", metavar="BLEND")
@options.span_option
@options.sample_options
@options.viewer_options(several=False)
@options.metric_options
@options.library_option
@options.json_option
def command(blend: str, span: str | None, metric: str, threshold: float | None, libraries: tuple[str, ...], as_json: bool,
            **given: Any) -> None:
    """Show the colours of BLEND (a file, or - for standard input) over pH.

    Example: mixind predict examples/drip_line.toml --ph 4.5:7.5:0.5
    """
    limit = options.chosen_threshold(metric, threshold) if threshold is not None else METRICS[metric].threshold
    read, conditions, remarks = options.blend_and_conditions(blend, libraries, given)
    pH = options.given_span(span, read)
    found = predict(read, pH, conditions)
    if as_json:
        printing.as_json({
            "mixind": VERSION, "blend": read.facts(), "conditions": conditions.facts(), "rows": found.rows(),
            "separation": found.separation(metric).round(4).tolist(), "metric": metric, "remarks": remarks})
        return
    for text in remarks:
        printing.remark(text)
    printing.print_blend(read)
    printing.print_colours(found, metric, METRICS[metric].kL)
    if pH.size > 1:
        worst = found.worst(metric=metric)
        printing.print_separation(worst.separation, worst.pair, limit, metric, METRICS[metric].kL)
    printing.print_trust(found)
