"""Runs the commands of the pages for the three readers and of the README, and renews what they print and draw.

Each page (`forecaster.md`, `fire_analyst.md`, `hydrologist.md`) has blocks marked `<!-- tour -->`: a command, and what
it prints. This script runs all of them in one empty folder beside a copy of `demo_terrain`, writes the output back into
the pages, cuts the figures out of the reports and says which numbers of the text no longer stand in any output or
report (numbers of the text that come from a run stand `in backquotes`):

    python docs/make_reader_pages.py

tests/project/test_reader_pages.py does the same without writing.
"""

from __future__ import annotations

import contextlib
import html
import io
import os
import re
import shlex
import shutil
import sys
import tempfile
import xml.etree.ElementTree as ET
from itertools import zip_longest
from pathlib import Path
from typing import TYPE_CHECKING

from orolift.cli.main import exit_code
from orolift.sources.files import write_all

if TYPE_CHECKING:
    from collections.abc import Iterator

HERE = Path(__file__).resolve().parent
STYLE = HERE.parent / "orolift" / "report" / "templates" / "style.css"
PAGES = ("forecaster", "fire_analyst", "hydrologist")
FIGURES = {
    "timeline": ("varn_hours_hours.html", "timeline-1"),
    "dry_section": ("varn_dry.html", "section"),
    "roses": ("varn_dry_bearings.html", "roses-1"),
    "rain_map": ("storm/varn_moist.html", "rain-map"),
    "rain_line": ("storm/varn_moist.html", "rain-line"),
}
TOUR = re.compile(r"(?<=<!-- tour -->\n```console\n)\$ orolift ([^\n]*)\n(.*?)(?=^```$)", re.MULTILINE | re.DOTALL)
NUMBER = re.compile(r"[+−-]?\d+(?:\.\d+)?")
MANY = ("cross", "hours", "bearings", "compare")  # commands that may use several processes


def text_of(name: str) -> str:
    """A page as it stands."""
    return (HERE / f"{name}.md").read_text(encoding="utf-8")


@contextlib.contextmanager
def working_folder(folder: Path) -> Iterator[None]:
    """The demo cases in a folder, which is the current one meanwhile, and a fixed time stamp."""
    shutil.copytree(HERE.parent / "demo_terrain", folder / "demo_terrain")
    before, stamp = Path.cwd(), os.environ.get("SOURCE_DATE_EPOCH")
    os.chdir(folder)
    os.environ["SOURCE_DATE_EPOCH"] = "1793739600"
    try:
        yield
    finally:
        os.chdir(before)
        os.environ.pop("SOURCE_DATE_EPOCH")
        if stamp is not None:
            os.environ["SOURCE_DATE_EPOCH"] = stamp


def outputs(folder: Path) -> dict[str, str]:
    """What each command of the pages prints, each run once, in the order of the pages."""
    found: dict[str, str] = {}
    with working_folder(folder):
        for command, _ in (step for name in PAGES for step in TOUR.findall(text_of(name))):
            if command not in found:
                arguments = shlex.split(command)
                alone = ["--jobs", "1"] if arguments[0] in MANY else []  # changes no number
                printed = io.StringIO()
                with contextlib.redirect_stdout(printed), contextlib.redirect_stderr(printed):
                    code = exit_code([*arguments, *alone])
                if code:
                    raise SystemExit(f"'orolift {command}' ends with {code}: {printed.getvalue()}")
                found[command] = printed.getvalue()
    return found


def renewed(text: str, found: dict[str, str]) -> str:
    """A page with the output of now, and with the numbers that its text quotes from there."""
    moved = {}
    for command, shown in TOUR.findall(text):
        for quoted in quoted_numbers(text):
            now = counterpart(quoted, shown, found[command])
            if now is not None:
                moved.setdefault(quoted, now)
    new = TOUR.sub(lambda step: f"$ orolift {step[1]}\n{found[step[1]]}", text)
    return re.sub(r"`([^`\n]*)`", lambda span: f"`{moved.get(span[1], span[1])}`", new)


def counterpart(quoted: str, before: str, now: str) -> str | None:
    """What stands now where a quotation stood, when nothing but numbers has changed in its line."""
    for old, new in zip(before.splitlines(), now.splitlines(), strict=False):
        at = re.search(whole(quoted), old)
        if at is not None and NUMBER.sub("#", old) == NUMBER.sub("#", new):
            first, last = (len(NUMBER.findall(old[:end])) for end in at.span())
            fresh = NUMBER.findall(new)[first:last]
            return "".join(part for pair in zip_longest(NUMBER.split(quoted), fresh, fillvalue="") for part in pair)
    return None


def whole(quoted: str) -> str:
    """Pattern of a quotation whose first and last numbers are whole ones."""
    return rf"(?<![\d.]){re.escape(quoted)}(?!\d|\.\d)"


def renewed_readme(text: str, folder: Path) -> str:
    """The README with the output of now: its tour, but for the slip of the pen at its end, and its Python lines."""
    with working_folder(folder):
        for command, shown in TOUR.findall(text)[:-1]:
            printed = io.StringIO()
            with contextlib.redirect_stdout(printed):
                exit_code(shlex.split(command))
            text = text.replace(f"$ orolift {command}\n{shown}", f"$ orolift {command}\n{printed.getvalue()}")
    lines, shown = re.findall(r"(?ms)^```python\n(.*?)^```\n\n```text\n(.*?)^```$", text)[0]
    printed = io.StringIO()
    with contextlib.redirect_stdout(printed):
        exec(compile(lines, "README.md", "exec"), {})  # noqa: S102 (our own page)
    return text.replace(f"```text\n{shown}```", f"```text\n{printed.getvalue()}```")


def readable(page: Path) -> str:
    """The words of a report, one space between any two."""
    bare = re.sub(r"<(style|script|svg)\b.*?</\1>", " ", page.read_text(encoding="utf-8"), flags=re.DOTALL)
    return " ".join(html.unescape(re.sub(r"<[^>]*>", " ", bare)).split())


def quoted_numbers(text: str) -> list[str]:
    """What a page quotes from outputs and reports: words with a number, `in backquotes`, outside blocks."""
    spans = re.findall(r"`([^`]*)`", re.sub(r"(?ms)^```.*?^```", "", text))
    return [" ".join(span.split()) for span in spans if re.search(r"\d", span) and not re.search("[=_]", span)]


def loose_numbers(text: str, found: dict[str, str], folder: Path) -> list[str]:
    """Quoted numbers of a page that stand neither in its outputs nor in the reports they wrote."""
    shown = " ".join("".join(found[command] for command, _ in TOUR.findall(text)).split())
    for page in re.findall(r"(?:Report|Index): (\S+\.html)", shown):
        shown += " " + readable(folder / page)
    spaced = re.sub(r"\s+([,.;:)])", r"\1", shown)
    return [one for one in quoted_numbers(text) if not re.search(whole(one), spaced)]


def figure(page: Path, name: str) -> str:
    """One figure of a report as an SVG file of its own, in its light colours."""
    found = re.search(rf'<svg class="wide"[^>]*"figure-{name}-wide-title.*?</svg>', page.read_text("utf-8"), re.DOTALL)
    if found is None:
        raise SystemExit(f"{page} has no figure {name}.")
    drawing = re.sub(r' id="ruler-[^"]*"', "", found[0])
    width, height = re.findall(r'viewBox="0 0 ([\d.]+) ([\d.]+)"', drawing)[0]
    start = f'<style>{rules(drawing)}</style><rect width="{width}" height="{height}" fill="#fdfcf9"/>'
    head, rest = drawing.split(">", maxsplit=1)
    return f'{head} xmlns="http://www.w3.org/2000/svg">{start}{rest}\n'


def rules(drawing: str) -> str:
    """The rules of style.css that a drawing uses, with the colours put in."""
    style = re.sub(r"/\*.*?\*/", "", STYLE.read_text(encoding="utf-8"), flags=re.DOTALL)
    colours = dict(re.findall(r"(--[\w-]+):\s*([^;]+);", style.partition("}")[0]))
    used = {name for names in re.findall(r'class="([^"]*)"', drawing) for name in names.split()}
    kept = []
    for selectors, body in re.findall(r"^([^@{}\s][^{}]*)\{([^{}]*)\}", style, re.MULTILINE):
        wanted = [one.strip() for one in selectors.split(",") if drawn(one.strip(), used)]
        if wanted:
            declared = re.sub(r"var\((--[\w-]+)\)", lambda name: colours[name[1]].replace('"', "'"), body)
            kept.append(f"{','.join(wanted)}{{{' '.join(declared.split())}}}")
    return "".join(kept)


def drawn(selector: str, used: set[str]) -> bool:
    """Whether a selector is about drawings, and only about classes that are used."""
    tags = set(re.findall(r"(?<![\w.#:-])[a-z][\w-]*", selector))
    classes = set(re.findall(r"\.([\w-]+)", selector))
    return (
        tags <= {"svg", "text", "path", "circle"} and classes <= used and bool(tags | classes) and "#" not in selector
    )


def labels(drawing: str) -> str:
    """The words of a figure."""
    root = ET.fromstring(drawing)  # noqa: S314 (our own)
    return " ".join("".join(text.itertext()) for text in root.iter("{http://www.w3.org/2000/svg}text"))


def main() -> None:
    """Renew pages and figures."""
    with tempfile.TemporaryDirectory() as made:
        folder = Path(made)
        found = outputs(folder)
        pages = {name: renewed(text_of(name), found) for name in PAGES}
        files = {HERE / f"{name}.md": text.encode() for name, text in pages.items()}
        readme = HERE.parent / "README.md"
        files[readme] = renewed_readme(readme.read_text(encoding="utf-8"), folder / "readme").encode()
        (HERE / "readers").mkdir(exist_ok=True)
        for name, (report, inside) in FIGURES.items():
            files[HERE / "readers" / f"{name}.svg"] = figure(folder / report, inside).encode()
        write_all(files)
        sys.stdout.write(f"Written: {', '.join(str(file.relative_to(HERE.parent)) for file in files)}\n")
        for name, text in pages.items():
            for number in loose_numbers(text, found, folder):
                sys.stdout.write(f"docs/{name}.md: `{number}` stands in no output and report of now\n")


if __name__ == "__main__":
    main()
