"""The march: reversible when nothing leaves, water and entropy closed, converged in its steps."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.air.parcel import Parcel, ascent, enthalpy, entropy, without_condensate
from orolift.crossing.march import march

START = Parcel(np.array(95e3), np.array(287.15), np.array(0.008), np.array(0.0))


def over_a_ridge(top: float, steps: int = 256) -> np.ndarray:
    """Pressures from 950 hPa to a top and back."""
    up = np.linspace(95e3, top, steps)
    return np.concatenate([up, up[-2::-1]])


@settings(deadline=None, max_examples=50)
@given(
    top=st.floats(35e3, 94e3), temperature=st.floats(255.0, 303.0), share=st.floats(0.05, 1.0), freezing=st.booleans()
)
def test_nothing_removed_returns_exactly(top, temperature, share, freezing):
    """Reversible ascent returns to the same temperature, vapour and cloud, whatever the steps."""
    from orolift.air.saturation import saturation_mixing_ratio

    vapour = share * saturation_mixing_ratio(95e3, temperature, freezing=freezing)
    start = Parcel(np.array(95e3), np.array(temperature), np.asarray(vapour), np.array(0.0))
    path = march(start, over_a_ridge(top, 12), 0.0, freezing=freezing)
    assert path.temperature[-1] == pytest.approx(temperature, abs=1e-9)
    assert path.vapour[-1] == pytest.approx(float(vapour), abs=1e-14)
    assert path.removed.sum() == 0.0


@settings(deadline=None, max_examples=50)
@given(top=st.floats(40e3, 90e3), share=st.floats(0.0, 1.0), freezing=st.booleans())
def test_water_and_entropy_close(top, share, freezing):
    """Vapour in = vapour out + cloud out + removed; entropy falls by exactly what the removed water holds."""
    path = march(START, over_a_ridge(top, 60), share, freezing=freezing)
    assert float(path.vapour[-1] + path.cloud[-1] + path.removed.sum()) == pytest.approx(0.008, rel=1e-12)
    carried = 0.0
    for i in np.flatnonzero(path.removed > 0.0):
        before = Parcel(path.pressure[i], path.temperature[i], path.vapour[i], path.cloud[i] + path.removed[i])
        after, _ = without_condensate(before, path.removed[i] / before.cloud)
        carried += float(entropy(before, freezing=freezing) - entropy(after, freezing=freezing))
    assert float(path.entropy[-1]) + carried == pytest.approx(float(entropy(START, freezing=freezing)), rel=1e-12)


def test_energy_is_the_work_of_the_pressure():
    """First law: enthalpy gained = integral of volume dp, by quadrature fine enough to see 1e-6 of it."""
    from orolift.constants import EPSILON, R_DRY

    pressure = np.linspace(95e3, 60e3, 20001)
    path = march(START, pressure, 0.0)
    here = Parcel(path.pressure, path.temperature, path.vapour, path.cloud)
    # volume per kg of dry air: the dry partial pressure carries one kilogram
    dry_pressure = path.pressure * EPSILON / (EPSILON + path.vapour)
    volume = R_DRY * path.temperature / dry_pressure
    work = np.trapezoid(volume, path.pressure)
    assert float(enthalpy(here)[-1] - enthalpy(here)[0]) == pytest.approx(work, rel=1e-6)


def test_removal_converges_with_the_steps():
    """All condensate removed as it forms: the march approaches the finely integrated pseudoadiabat, first order.

    The reference is `ascent` at 2000 steps, itself checked against an adaptive solver in tests/air.
    """
    fine, _ = ascent(START, 50e3, removed_share=1.0, steps=2000)
    errors = [
        float(march(START, np.linspace(95e3, 50e3, steps), 1.0).temperature[-1] - fine.temperature)
        for steps in (64, 128, 256, 512)
    ]
    assert abs(errors[-1]) < 0.01
    assert errors[2] / errors[3] == pytest.approx(2.0, abs=0.3)


def test_streamlines_march_together_as_alone():
    """Leading axes are free: every streamline of a block gets what it gets alone."""
    paths = np.stack([over_a_ridge(top, 20) for top in (90e3, 70e3, 50e3)], axis=1)
    start = Parcel(np.full(3, 95e3), np.array([280.0, 287.15, 293.0]), np.array([0.005, 0.008, 0.010]), np.zeros(3))
    block = march(start, paths, 0.6)
    for i in range(3):
        alone = march(
            Parcel(start.pressure[i], start.temperature[i], start.vapour[i], start.cloud[i]), paths[:, i], 0.6
        )
        np.testing.assert_allclose(block.temperature[:, i], alone.temperature, rtol=1e-12)
        np.testing.assert_allclose(block.removed[:, i], alone.removed, atol=1e-14)
