"""What happens to moist air that crosses a mountain range.

The layers, from the ground up: `constants`, `errors` and `checks`; `air` and
`terrain`; `crossing`; `sources`; `report`; `cli`. Imports point down only.
"""

__version__ = "0.1.0"
