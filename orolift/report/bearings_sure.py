"""How sure the directions of a site are, in words: ranges, how many members agree, from where air crosses at all."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount
from orolift.report.spans import ranged
from orolift.spread.agreement import reach_of
from orolift.spread.state_ranges import chance_at, lost_members, range_at

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from orolift.report.words import Words
    from orolift.spread.bearings import Bearings, SiteBearings
    from orolift.spread.site_state import SiteState

FEW = 0.1
"""Share of the members from which on another direction that is worst in them is named; a judgement."""
HALF = 0.5
"""Share of the members below which they do not agree with the direction named."""
HOW_MEMBERS = (
    (
        "A range in brackets holds the middle eight tenths of the members, each with its own draw of every input, the "
        "same in all directions. To temperature, warming, humidity, wind and drying the error of the method is added; "
        "for rain no such error is stated, and its range is too narrow."
    ),
    (
        "How sure a direction is: the share of the members whose own warmest, worst or wettest direction is that one, "
        "or the next to it where directions are 30° apart or less. The error of the method is taken to be the same "
        "from every side; it may not be, and then the shares are too high."
    ),
    (
        "Whether air crosses at all is counted among all members: more than 2 m/s across the range. A member's wind "
        "turns against the line, which stays."
    ),
)
"""What the ranges are, for the page."""


def with_range(amount: Amount, state: SiteState, name: str) -> Words:
    """A number of a site with its range, where there are members.

    Parameters
    ----------
    amount : Amount
    state : SiteState
    name : str
        Of the array of members.

    Returns
    -------
    Words
    """
    return ranged(amount, range_at(state, name))


def agreement_words(site: SiteBearings, bearings: Bearings) -> Words:
    """How many members agree on the directions of a site, as a sentence; nothing without members.

    Parameters
    ----------
    site : SiteBearings
    bearings : Bearings

    Returns
    -------
    Words
    """
    shares = _shares(site)
    if not shares:
        return ()
    reach = reach_of(bearings.step)
    near: Words = (" within ", Amount(reach, "bearing"), " of") if reach > 0.0 else ()
    out: list[str | Amount] = ["How sure: "]
    for number, (what, share, whose) in enumerate(shares):
        out += ["the ", what, " is", *near, " that named in "] if number == 0 else [", the ", what.split()[0], " in "]
        out += [Amount(share, "share"), whose or ("" if number else " of the members")]
    return (*out, ".", *_next_worst(site, bearings))


def _next_worst(site: SiteBearings, bearings: Bearings) -> Words:
    """The direction that is worst for fire in most of the other members; nothing where they are few."""
    found = _other_worst(site, bearings)
    if found is None or found[1] < FEW:
        return ()
    number, share = found
    reach, there = reach_of(bearings.step), Amount(float(bearings.wind_from[number]), "bearing")
    near: Words = ("within ", Amount(reach, "bearing"), " of ") if reach > 0.0 else ()
    return (" In ", Amount(share, "share"), " the worst for fire is ", *near, there, ".")


def _other_worst(site: SiteBearings, bearings: Bearings) -> tuple[int, float] | None:
    """The direction apart from that named which is worst for fire in most members, and their share.

    The directions beside it count with it, as beside that named, but none counts for both.
    """
    if site.fire is None or site.worst is None:
        return None
    others = np.where(_near(bearings, site.fire), 0.0, np.nan_to_num(site.worst))
    number = int(np.argmax(others))
    return number, float(others[_near(bearings, number)].sum())


def _near(bearings: Bearings, number: int) -> NDArray[np.bool_]:
    """Directions that count as the same answer as one of them."""
    apart = np.abs((bearings.wind_from - bearings.wind_from[number] + np.pi) % (2.0 * np.pi) - np.pi)
    return np.asarray(apart <= reach_of(bearings.step) + 1e-6, dtype=np.bool_)


def though_words(site: SiteBearings, bearings: Bearings) -> Words:
    """That more members have another direction as their worst for fire than the one named; nothing otherwise.

    Parameters
    ----------
    site : SiteBearings
    bearings : Bearings

    Returns
    -------
    Words
        To stand behind the direction named, with a comma before them.

    Notes
    -----
    Said where fewer than half of the members agree with the answer and more have another direction, either counted
    with the directions beside it, see `orolift.spread.agreement.reach_of`.
    """
    found, agreement = _other_worst(site, bearings), site.agreement
    if found is None or agreement is None or agreement.fire is None or agreement.fire >= HALF:
        return ()
    number, share = found
    if share <= agreement.fire:
        return ()
    many = "most" if share > HALF else "more"
    about = "about " if reach_of(bearings.step) > 0.0 else ""
    return (f", though in {many} members from {about}", Amount(float(bearings.wind_from[number]), "bearing"))


def _shares(site: SiteBearings) -> list[tuple[str, float, str]]:
    """What is named, the share of members that agree, and of which members where that is not all."""
    found = site.agreement
    if found is None:
        return []
    named = [
        ("worst direction for fire", found.fire, ""),
        ("warmest direction", found.warmest, ""),
        ("wettest direction", found.rain, " of those with rain"),
    ]
    return [(what, share, whose) for what, share, whose in named if share is not None]


def crossing_words(site: SiteBearings) -> Words:
    """From how many directions air crosses, as a sentence; nothing where it does from all of them.

    Parameters
    ----------
    site : SiteBearings

    Returns
    -------
    Words
    """
    total = len(site.states)
    none = sum(state.status == "no crossing" for state in site.states)
    chances = [chance_at(state, "crosses") for state in site.states]
    some = sum(chance is not None and 0.0 < chance < 1.0 for chance in chances)
    out: Words = ()
    if none:
        out = ("From ", Amount(none, "plain"), " of ", Amount(total, "plain"), " directions no air crosses.")
    if some:
        more = " From " if none else "From "
        whole: Words = () if none else (" of ", Amount(total, "plain"))
        does = "it does" if none else "air crosses"
        out = (*out, more, Amount(some, "plain"), *whole, f" directions {does} in some members only.")
    return out


def lost_words(bearings: Bearings) -> Words:
    """How many crossings have lost members, as a sentence; nothing where none has."""
    lost = sum(lost_members(state) for site in bearings.sites for state in site.states)
    if not lost:
        return ()
    return ("In ", Amount(lost, "plain"), " crossings some members could not be worked out; they count in no range.")


def members_line(site: SiteBearings, bearings: Bearings, members: int) -> Words:
    """What the members say of a site, in one line for the terminal; nothing without them.

    Parameters
    ----------
    site : SiteBearings
    bearings : Bearings
    members : int
        How many there are.

    Returns
    -------
    Words
    """
    shares = _shares(site)
    if not shares:
        return ()
    out: list[str | Amount] = [f"{members} members: "]
    state = None if site.warmest is None else site.states[site.warmest]
    if state is not None and state.warming is not None and state.warming > 0.0:
        out += ["warmer by ", *with_range(Amount(state.warming, "temperature_difference", 1), state, "warming"), "; "]
    reach = reach_of(bearings.step)
    beside: Words = (" within ", Amount(reach, "bearing")) if reach > 0.0 else (" as named",)
    for number, (what, share, whose) in enumerate(shares):
        name = what.replace(" direction", "")
        out += [f"{', ' if number else ''}{name}", *(() if number else beside), " in ", Amount(share, "share"), whose]
    return tuple(out)
