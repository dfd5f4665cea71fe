"""Units: factors against published tables."""

import pytest

from orolift.sources.units import UNITS, alternatives, converted, nearest, suffix_of

PUBLISHED = [
    pytest.param(212.0, "f", "c", 100.0, id="boiling point, BIPM SI brochure by definition of F"),
    pytest.param(1.0, "kt", "ms", 0.514444, id="NIST SP 811 (2008) B.8: 1 knot"),
    pytest.param(1.0, "mph", "ms", 0.44704, id="NIST SP 811 (2008) B.8: mile per hour"),
    pytest.param(1.0, "mi", "km", 1.609344, id="NIST SP 811 (2008) B.8: mile"),
    pytest.param(1.0, "ft", "m", 0.3048, id="NIST SP 811 (2008) B.8: foot"),
    pytest.param(29.9213, "inhg", "hpa", 1013.25, id="standard atmosphere, US Standard Atmosphere 1976"),
]


@pytest.mark.parametrize(("value", "unit", "wanted", "expected"), PUBLISHED)
def test_factors(value, unit, wanted, expected):
    """rtol: the printed values carry six digits."""
    assert converted(value, unit, wanted) == pytest.approx(expected, rel=2e-6)


@pytest.mark.parametrize("suffix", sorted(UNITS))
def test_there_and_back(suffix):
    """Every unit converts to its fellows and back."""
    for other in [alt.removeprefix("x_") for alt in alternatives(f"x_{suffix}")]:
        assert converted(converted(7.5, suffix, other), other, suffix) == pytest.approx(7.5, rel=1e-12)


def test_the_longest_suffix_wins():
    """`_c_per_km` is one unit, not kilometres."""
    assert suffix_of("lapse_rate_c_per_km") == ("lapse_rate", "c_per_km")
    assert suffix_of("pressure") is None


def test_nearest_stays_silent_when_nothing_is_alike():
    """A suggestion is made only when it may help."""
    assert nearest("zzzz", ["temperature_c"]) is None
