"""Page data to one HTML file: the only import of jinja2.

Templates are compiled once for each version of Python and of themselves, and kept beside them as Python keeps its
own modules: in `__pycache__`, if that may be written and Python is not told otherwise. Without it a report takes
0.15 s longer.
"""

from __future__ import annotations

import base64
import hashlib
import sys
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from tempfile import NamedTemporaryFile
from typing import TYPE_CHECKING

from jinja2 import BytecodeCache, Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from orolift.report.local_units import local
from orolift.report.quantities import bare, shown, unit
from orolift.report.words import plain

if TYPE_CHECKING:
    from jinja2.bccache import Bucket

    from orolift.report.bearings_page import BearingsPage
    from orolift.report.compare import ComparePage
    from orolift.report.hours_page import HoursPage
    from orolift.report.index import IndexPage
    from orolift.report.page import Page
    from orolift.report.site_index import SiteIndex

INLINED = ("style.css", "reading.js", "sorting.js")
"""Files of the package that pages carry inside them."""


@dataclass(frozen=True)
class Inlined:
    """A file of this package as it stands in a page.

    Attributes
    ----------
    text : Markup
    hash : str
        Of exactly this text, as a content security policy names it.
    """

    text: Markup
    hash: str


def render(
    page: Page | IndexPage | ComparePage | HoursPage | BearingsPage | SiteIndex, template: str = "page.html.jinja"
) -> str:
    """A page as one self-contained HTML file.

    Parameters
    ----------
    page : Page, IndexPage, ComparePage, HoursPage, BearingsPage or SiteIndex
        With at least a title, a version, a time it was made and units.
    template : str
        Name of the template that extends the skeleton and is written for this kind of page.

    Returns
    -------
    str
        The same text for the same page, whenever and wherever it is made.
    """
    return _environment().get_template(template).render(page=page)


class _BesideTemplates(BytecodeCache):
    """Compiled templates in `__pycache__` beside the templates; jinja2 checks that they belong to what they say."""

    folder = Path(__file__).parent / "templates" / "__pycache__"

    def _file(self, bucket: Bucket) -> Path:
        return self.folder / f"{bucket.key}.{sys.implementation.cache_tag}.compiled"

    def load_bytecode(self, bucket: Bucket) -> None:
        """What was kept; nothing where nothing can be read."""
        try:
            with self._file(bucket).open("rb") as stream:
                bucket.load_bytecode(stream)
        except OSError:
            bucket.reset()

    def dump_bytecode(self, bucket: Bucket) -> None:
        """Keep it whole or not at all."""
        if sys.dont_write_bytecode:
            return
        try:
            self.folder.mkdir(exist_ok=True)
            with NamedTemporaryFile(dir=self.folder, delete=False) as stream:
                bucket.write_bytecode(stream)
            Path(stream.name).replace(self._file(bucket))
        except OSError:
            return


@cache
def _environment() -> Environment:
    loader = PackageLoader("orolift.report", "templates")
    environment = Environment(
        loader=loader,
        autoescape=True,  # select_autoescape() skips names ending in .jinja
        undefined=StrictUndefined,  # a misspelt field stops the run, not the reader
        trim_blocks=True,
        lstrip_blocks=True,
        auto_reload=False,
        bytecode_cache=_BesideTemplates(),
    )
    environment.globals["inlined"] = {name: _inlined(loader.get_source(environment, name)[0]) for name in INLINED}
    environment.filters.update(shown=shown, bare=bare, unit=unit, plain=plain, local=local)
    return environment


def _inlined(text: str) -> Inlined:
    """A file as data: as a template "{#" of a style rule would open a comment."""
    digest = base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()
    return Inlined(Markup(text), f"sha256-{digest}")  # noqa: S704 (a file of this package, no input reaches it)
