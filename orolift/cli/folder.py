"""`--folder`: everything of some cases side by side, with an index page that links it."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from orolift.cli.over_map import RainFiles, rain_files

if TYPE_CHECKING:
    from collections.abc import Iterable

    from orolift.cli.cross import Worked
    from orolift.cli.outputs import Outputs
    from orolift.cli.spreading import Workers
    from orolift.report.index import Entry
    from orolift.report.quantities import Units

SAID = {
    "json": "results",
    "csv": "table of the sites",
    "geojson": "sites on the map",
    "toml": "fitted times",
}


def into_folder(
    cases: tuple[str, ...], folder: Path, units: Units, outputs: Outputs, work: Workers
) -> list[tuple[Worked, Path]]:
    """Work out cases, and take in everything they give and the index.

    Parameters
    ----------
    cases : tuple of str
    folder : Path
    units : 'metric' or 'us'
    outputs : Outputs
        Takes in the files.
    work : Workers

    Returns
    -------
    list of (Worked, Path)
        Each case and its page.
    """
    from orolift.cli.cross import add_results, report_of, work_out

    summaries, entries = [], []
    for case in cases:
        before = set(outputs.contents)
        worked = work_out(case, workers=work)
        stem = folder / worked.inputs.path.stem
        page = Path(f"{stem}.html")
        outputs.add(page, report_of(worked, units).encode(), f"the report of {case}")
        add_results(worked, f"{stem}.json", f"{stem}.csv", outputs)
        wanted = all_rain_files(worked, folder)
        for path, (content, _) in rain_files(wanted, worked.inputs, worked.mapped, worked.results).items():
            outputs.add(path, content, f"a file of {case}")
        entries.append(entry(worked, page, [path for path in outputs.contents if path not in before and path != page]))
        summaries.append((worked, page))
    outputs.add(folder / "index.html", index_html(entries, units).encode(), "the index")
    return summaries


def all_rain_files(worked: Worked, folder: Path) -> RainFiles:
    """Every file about rain that a case can give, in a folder.

    Parameters
    ----------
    worked : Worked
    folder : Path

    Returns
    -------
    RainFiles
    """
    stem, case, mapped = worked.inputs.path.stem, worked.inputs.case, worked.mapped
    with_raster = case.terrain.elevation_file is not None
    if mapped is None:
        return RainFiles(geojson=str(folder / f"{stem}.geojson") if with_raster else None)
    rain = mapped.rain
    return RainFiles(
        maps=str(folder),
        geojson=str(folder / f"{stem}.geojson"),
        catchments=str(folder / f"{stem}_catchments.csv") if rain.catchments else None,
        gauges=str(folder / f"{stem}_gauges.csv") if rain.comparison is not None else None,
        fit=str(folder / f"{stem}_fit.toml") if rain.fit is not None else None,
    )


def entry(worked: Worked, report: Path, files: Iterable[Path]) -> Entry:
    """The line of a case in the index.

    Parameters
    ----------
    worked : Worked
    report : Path
        Its page.
    files : iterable of Path
        What was written beside it.

    Returns
    -------
    Entry
    """
    from orolift.report.index import entry_of

    case, stem = worked.inputs.case, worked.inputs.path.stem
    return entry_of(
        worked.crossing,
        title=case.title or stem,
        valid_time=case.valid_time,
        report=report.name,
        files={_said(path, stem): path.name for path in files},
        spread=worked.spread,
    )


def _said(path: Path, stem: str) -> str:
    """What a file is, in words: the part of its name after that of the case, or its kind."""
    own = path.stem.removeprefix(stem).strip("_").replace("_", " ")
    return own or SAID.get(path.suffix.strip("."), path.suffix.strip("."))


def index_html(entries: Iterable[Entry], units: Units) -> str:
    """The index page.

    Parameters
    ----------
    entries : iterable of Entry
    units : 'metric' or 'us'

    Returns
    -------
    str
    """
    from orolift import __version__
    from orolift.cli.outputs import made_now
    from orolift.report.index import index_of
    from orolift.report.render import render

    found = tuple(entries)
    page = index_of(found, title="Crossings side by side", made_at=made_now(), version=__version__, units=units)
    return render(page, "index.html.jinja")
