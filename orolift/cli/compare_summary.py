"""What `orolift compare` says on the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.report.compare import value_rows
from orolift.report.compare_onset import onset_words
from orolift.report.compare_words import ANSWER_NAMES, QUANTITY_KINDS, QUANTITY_NAMES, magnitude, signed
from orolift.report.quantities import MINUS, NO_BREAK_SPACE, quantity
from orolift.report.words import plain

if TYPE_CHECKING:
    from orolift.report.quantities import Units
    from orolift.spread.compared import Compared

MOST_VALUES = 16
"""Values beyond which none is listed on the terminal."""


def summary_lines(found: Compared, title: str, units: Units) -> list[str]:
    """Lines of the summary.

    Parameters
    ----------
    found : Compared
    title : str
    units : 'metric' or 'us'

    Returns
    -------
    list of str
    """
    lines = [title]
    rows = value_rows(found)
    for row in rows if len(rows) <= MOST_VALUES else ():
        inside = {True: "inside the range", False: "outside the range", None: "no range"}[row.is_inside]
        lines.append(
            f"{row.name}: {row.quantity} {plain(row.estimate, units)}, observed {plain(row.observed, units)}, "
            f"difference {plain(row.difference, units)}, {inside}"
        )
    if len(rows) > MOST_VALUES:
        lines.append(f"{len(rows)} values compared; the page shows them.")
    for one in found.verdicts:
        if one.score.count > 1:
            kind, digits = QUANTITY_KINDS[one.quantity].difference
            bias = plain(signed(one.score.bias, kind, digits), units)
            error = quantity(one.score.mean_absolute_error, magnitude(kind), digits, units)
            skills = ", ".join(
                f"{100.0 * value:+.0f} % against {ANSWER_NAMES[name]}".replace("-", MINUS)
                for name, value in one.skill.items()
            )
            lines.append(
                f"{QUANTITY_NAMES[one.quantity]}: {one.score.count} values, bias {bias}, mean absolute error "
                f"{error}" + (f"; skill {skills}" if skills else "")
            )
    lines += [plain(words, units) for words in onset_words(found)]
    lines += [f"Caution: {text}" for text in found.cautions]
    return [line.replace(NO_BREAK_SPACE, " ") for line in lines]
