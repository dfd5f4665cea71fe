"""`--folder`: everything of some cases side by side, or of many crossings of one, with an index page that links it."""

from __future__ import annotations

from importlib.util import find_spec
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.cli.outputs import refuse_together
from orolift.cli.over_map import RainFiles, rain_files

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

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

KINDS = {"report": "html", "results": "json", "table": "csv", "netcdf": "nc"}
"""Kind of file, by the option that asks for it."""


def planned_files(
    files: Mapping[str, str | None], stem: str, folder: str | None, outputs: Outputs
) -> dict[str, str | None]:
    """Name the files of a command that writes one page, before any work.

    Parameters
    ----------
    files : mapping of str to str or None
        Asked for by name, by the name of their option.
    stem : str
        Of the names of those that are not.
    folder : str or None
        For all of them, with an index: NetCDF only where it can be written.
    outputs : Outputs

    Returns
    -------
    dict of str to str or None
        As `files`, with the page, and with the index where there is a folder.

    Raises
    ------
    CaseError, MissingFileError
        That names the file, or options that cannot be met together.
    """
    refuse_together([f"--{option}" for option, name in files.items() if name is not None], 1, folder)
    if folder is None:
        found = {**files, "report": files["report"] or f"{stem}.html"}
        for option, name in found.items():
            if name is not None:
                outputs.plan(name, f"--{option}")
        return found
    outputs.plan_folder(Path(folder), "--folder")
    wanted = [option for option in files if option != "netcdf" or find_spec("netCDF4") is not None]
    names = {option: str(Path(folder) / f"{stem}.{KINDS[option]}") for option in wanted}
    names["index"] = str(Path(folder) / "index.html")
    for option, name in names.items():
        outputs.plan(name, f"the {option} in --folder")
    return {**dict.fromkeys(files), **names}


def beside(files: Mapping[str, str | None]) -> dict[str, str]:
    """Names of the files beside a page and its index, by what they are.

    Parameters
    ----------
    files : mapping of str to str or None
        As `planned_files` gives them.

    Returns
    -------
    dict of str to str
    """
    said = {"results": "results", "table": "table", "netcdf": "NetCDF"}
    return {what: Path(name).name for option, what in said.items() if (name := files.get(option)) is not None}


def where(files: Mapping[str, str | None]) -> list[str]:
    """Lines for the terminal: where the page is, and the index.

    Parameters
    ----------
    files : mapping of str to str or None
        As `planned_files` gives them.

    Returns
    -------
    list of str
    """
    return [f"{option.capitalize()}: {files[option]}" for option in ("report", "index") if files.get(option)]


def plan_folder(cases: tuple[str, ...], folder: Path, outputs: Outputs) -> None:
    """Name the files that every case gives, before any work.

    Parameters
    ----------
    cases : tuple of str
    folder : Path
    outputs : Outputs
    """
    outputs.plan_folder(folder, "--folder")
    for case in cases:
        stem = folder / Path(case).stem
        outputs.plan(Path(f"{stem}.html"), f"the report of {case}")
        for kind, what in zip(("json", "csv"), _results_of(case), strict=True):
            outputs.plan(Path(f"{stem}.{kind}"), what)
    outputs.plan(folder / "index.html", "the index")


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
        add_results(worked, f"{stem}.json", f"{stem}.csv", outputs, _results_of(case))
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


def _results_of(case: str) -> tuple[str, str]:
    """Results and table of a case, for messages."""
    return f"the results of {case}", f"the table of {case}"


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
