"""`filmfit trend`: any result against any condition or date.

Knows options and words; the work stands in jobs/trend.py.
"""

from pathlib import Path

import click

from filmfit.cli.options import json_option, records_option
from filmfit.cli.rate import choice_options, process_word_of


@click.command(epilog="Example: filmfit trend --of resistivity_ohm_cm --against flows_sccm.O2")
@click.option("--of", "of", required=True, metavar="QUANTITY", help="A result, or a number of the lab's own columns.")
@click.option("--against", required=True, metavar="CONDITION", help="A condition, A/B for a ratio, or date.")
@choice_options
@click.option("--picture", type=click.Path(path_type=Path), metavar="FILE.svg", help="Draw it there.")
@records_option
@json_option
def trend(
    of: str, against: str, film: str | None, chamber: str | None, source: str | None, process: str | None,
    picture: Path | None, records: str, json_to: str | None,
) -> None:  # fmt: skip
    """Any result against any condition, each source and segment with its own level, and the optimum if there is one."""
    from filmfit.cli.options import write_json, write_whole
    from filmfit.cli.runs import must_exist
    from filmfit.jobs import trend as job
    from filmfit.records.store import Records
    from filmfit.report.plain import plain
    from filmfit.report.text import quantity

    must_exist(records)
    with Records(records) as store:
        found = job.trend(store, of, against, film=film, chamber=chamber, source=source,
                          process=process_word_of(process))  # fmt: skip
    best = found.optimum
    if picture is not None:
        from filmfit.report.rate_figures import draw_trend

        points = [(one.series, one.x, one.y) for one in found.points]
        write_whole(picture, draw_trend(points, of, against, None if best is None else best.x))
    if json_to is not None:
        shown = None if best is None else {"x": best.x.model_dump(mode="json"), "kind": best.kind}
        points_ = [{"run": p.run, "series": p.series, "x": p.x, "y": p.y.model_dump(mode="json")} for p in found.points]
        told = {"schema": "filmfit.trend/1", "of": of, "against": against, "points": points_, "optimum": shown}
        write_json({**told, "reason": found.reason or None}, json_to)
        return
    for point in found.points:
        click.echo(plain(f"{point.run:<16}{point.x:<12.6g}{quantity(point.y, ''):<44}{point.series}"))
    click.echo(plain(f"{best.kind} at {quantity(best.x, '')}" if best is not None else found.reason))
