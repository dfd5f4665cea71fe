"""Page data to one HTML file: the only import of jinja2."""

from __future__ import annotations

from functools import cache
from typing import TYPE_CHECKING

from jinja2 import Environment, PackageLoader, StrictUndefined
from markupsafe import Markup

from orolift.report.quantities import bare, shown, unit
from orolift.report.words import plain

if TYPE_CHECKING:
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
    )
    style, _, _ = loader.get_source(environment, "style.css")
    # The style sheet is ours and data: inside a template "{#" of a rule would open a comment.
    environment.globals["style"] = Markup(style)  # noqa: S704 (a file of this package, no input reaches it)
    environment.filters.update(shown=shown, bare=bare, unit=unit, plain=plain)
    return environment
