"""Constants carry unit and source, and are the published numbers."""

import pytest

from orolift import constants
from orolift.constants import Sourced, table

PUBLISHED = [
    pytest.param("R_DRY", 287.055, 3e-5, id="CODATA R over 28.9647 g/mol; the 1976 molar mass is 1e-5 smaller"),
    pytest.param("R_VAPOUR", 461.523, 2e-6, id="CODATA R over 18.01527 g/mol, IAPWS"),
    pytest.param("EPSILON", 0.62197, 3e-5, id="their ratio"),
    pytest.param("TRIPLE_POINT_PRESSURE", 611.657, 1e-9, id="IAPWS R14-08(2011), section 4"),
    pytest.param("LATENT_HEAT_VAPORISATION_TRIPLE", 2500.91e3, 1e-5, id="IAPWS-95 at 0.01 degC"),
    pytest.param("KAPPA", 0.2854, 3e-4, id="Bolton (1980), exponent of potential temperature"),
]


@pytest.mark.parametrize(("name", "value", "rel"), PUBLISHED)
def test_values(name, value, rel):
    """rel: the printed digits of the published number."""
    assert float(getattr(constants, name)) == pytest.approx(value, rel=rel)


def test_every_constant_has_unit_and_source():
    """No bare number among the public names."""
    for name, value in vars(constants).items():
        if name.isupper():
            assert isinstance(value, Sourced), name
            assert value.unit, name
            assert len(value.source) > 8, name
    assert len(table()) > 20


@pytest.mark.parametrize(("unit", "source"), [("", "somebody"), ("K", ""), ("K", "  ")])
def test_a_constant_without_source_does_not_import(unit, source):
    """An empty unit or source raises."""
    with pytest.raises(ValueError, match="has no unit or no source"):
        Sourced(1.0, unit, source)
