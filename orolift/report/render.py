"""Page data to one HTML file: the only import of jinja2.

Templates are compiled once for each version of Python and of themselves, and kept beside them as Python keeps its
own modules: in `__pycache__`, if that may be written and Python is not told otherwise. Without it a report takes
0.15 s longer.
"""

from __future__ import annotations

import sys
from functools import cache
from pathlib import Path
from tempfile import NamedTemporaryFile
from typing import TYPE_CHECKING

from jinja2 import BytecodeCache, Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from orolift.report.quantities import bare, shown, unit
from orolift.report.words import plain

if TYPE_CHECKING:
    from jinja2.bccache import Bucket

    from orolift.report.page import Page


def render(page: Page) -> str:
    """The report as one self-contained HTML file.

    Parameters
    ----------
    page : Page

    Returns
    -------
    str
        The same text for the same page, whenever and wherever it is made.
    """
    return _environment().get_template("page.html.jinja").render(page=page)


class _BesideTemplates(BytecodeCache):
    """Compiled templates in `__pycache__` beside the templates; jinja2 checks that they belong to what they say."""

    folder = Path(__file__).parent / "templates" / "__pycache__"

    def _file(self, bucket: Bucket) -> Path:
        return self.folder / f"{bucket.key}.{sys.implementation.cache_tag}.compiled"

    def load_bytecode(self, bucket: Bucket) -> None:
        try:
            with self._file(bucket).open("rb") as stream:
                bucket.load_bytecode(stream)
        except OSError:
            bucket.reset()

    def dump_bytecode(self, bucket: Bucket) -> None:
        if sys.dont_write_bytecode:
            return
        try:
            self.folder.mkdir(exist_ok=True)
            with NamedTemporaryFile(dir=self.folder, delete=False) as stream:
                bucket.write_bytecode(stream)
            Path(stream.name).replace(self._file(bucket))  # whole, or not at all
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
    style, _, _ = loader.get_source(environment, "style.css")
    # The style sheet is ours and data: inside a template "{#" of a rule would open a comment.
    environment.globals["style"] = Markup(style)  # noqa: S704 (a file of this package, no input reaches it)
    environment.filters.update(shown=shown, bare=bare, unit=unit, plain=plain)
    return environment
