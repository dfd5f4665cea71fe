"""The upwind column: drawn where its values say, styled by where it comes from; and what quality control has seen."""

import re
from dataclasses import replace

import numpy as np
import pytest

from orolift.air.column import freezing_level, interpolated, wind_component
from orolift.report.cautions import cautions
from orolift.report.figures.column import KINDS, column, grouped, profile
from orolift.report.figures.placing import box_of, meet
from orolift.report.inputs import inputs
from orolift.report.quantities import quantity
from orolift.report.render import render
from orolift.report.spans import Spans
from orolift.report.words import plain
from orolift.sources.quality import Finding

ASSUMED = "Only the ground of the incoming air was measured"


def with_origins(crossing, *kinds):
    """The crossing with the lowest levels of its column coming from elsewhere."""
    origin = (*kinds, *crossing.incoming.origin[len(kinds) :])
    return replace(crossing, incoming=replace(crossing.incoming, origin=origin))


def path_points(path):
    return np.array([[float(a), float(b)] for a, b in re.findall(r"(-?[\d.]+) (-?[\d.]+)", path)])


def forms(crossing, top=None, units="metric"):
    figure = column(crossing, top, units)
    return figure, (figure.drawing, figure.narrow)


def test_stability_is_that_of_the_definition(crossing):
    """N^2 = g d ln(theta_v)/dz; a dry column of lapse L has g / T (g / c_p - L), to some per mille for the layers' T."""
    air = crossing.incoming
    dry = replace(crossing, incoming=replace(air, vapour=np.zeros_like(air.vapour)))
    shown = profile(dry)
    middle = 0.5 * (shown.layers[1:] + shown.layers[:-1])
    lapse = 0.0065
    expected = np.sqrt(9.80665 / interpolated(air, middle).temperature * (9.80665 / 1004.7 - lapse))
    assert shown.stability == pytest.approx(expected, rel=0.03)


def test_column_reaches_well_above_the_crest(any_crossing):
    shown = profile(any_crossing)
    assert shown.height[0] == any_crossing.incoming.height[0]
    assert shown.height[-1] == pytest.approx(max(any_crossing.features.crest + 3000.0, 5000.0))
    assert shown.wind == pytest.approx(
        wind_component(interpolated(any_crossing.incoming, shown.height), any_crossing.flow.normal)
    )


@pytest.mark.parametrize("units", ["metric", "us"])
def test_labels_keep_off_each_other_and_inside(any_crossing, units):
    for drawing in forms(any_crossing, 900.0, units)[1]:
        boxes = [box_of(label, drawing.layout.letter) for label in drawing.labels]
        assert not any(meet(a, b) for i, a in enumerate(boxes) for b in boxes[:i])
        assert all(box.left >= 0.0 and box.right <= drawing.layout.width + 1.0 for box in boxes)
        texts = {label.text for label in drawing.labels}
        assert any(text.startswith("crest") for text in texts)


def test_crest_stands_at_its_height(crossing):
    for drawing in forms(crossing)[1]:
        marks = [(float(t.text.replace("\u202f", "")), t.at) for t in drawing.height_ticks]
        (low, start), (high, end) = marks[0], marks[-1]
        at = float(re.match(r"M[\d.]+ ([\d.]+)", drawing.levels[0].path)[1])
        assert low + (at - start) / (end - start) * (high - low) == pytest.approx(crossing.features.crest, abs=5.0)


def test_every_stretch_has_the_style_of_its_origin(crossing):
    kinds = ("measured",) * 5 + ("surface report blended in",) * 3 + ("model",) * 4
    figure, drawings = forms(with_origins(crossing, *kinds))
    for drawing in drawings:
        styles = {curve.kind for curve in drawing.curves}
        for name in ("known", "blended", "modelled", "assumed"):
            assert {f"warm {name}", f"speed {name}"} <= styles
            assert f"from {name}" in {curve.kind for curve in drawing.origins}
    for name in ("measured", "surface report blended in", "model", "lapse rate"):
        assert f"{name} from " in figure.caption
    assert {"measured", "model", "lapse rate"} <= {label.text for label in figure.drawing.labels}


def test_every_origin_has_a_style_of_its_own_sheet():
    from typing import get_args

    from orolift.air.column import Origin
    from orolift.report.render import _environment

    style = _environment().globals["inlined"]["style.css"].text
    assert set(get_args(Origin)) == set(KINDS)
    for kind in KINDS.values():
        assert f"\n.{kind} {{" in style


def test_stations_are_points_and_the_air_between_them_is_said(crossing):
    ladder = with_origins(crossing, "station", "between stations", "between stations", "station", "station")
    assert [name for name, *_ in grouped(profile(ladder).origin)] == ["between stations", "lapse rate"]
    assert profile(ladder).stations == (0, 3, 4)
    assert len(forms(ladder)[0].drawing.dots) == 6


def test_stagnant_air_is_hatched_up_to_its_top(crossing):
    figure, drawings = forms(crossing, 640.0)
    assert "below 640\u00a0m is stagnant" in figure.caption
    for drawing in drawings:
        assert [curve.kind for curve in drawing.stagnant] == ["blocked body", "blocked hatch"] * 3
    bare, drawings = forms(crossing)
    assert "stagnant" not in bare.caption + bare.alt
    assert not drawings[0].stagnant


def test_text_gives_ground_and_crest_in_numbers(crossing):
    alt = forms(crossing)[0].alt
    air = crossing.incoming
    assert quantity(float(air.temperature[0]), "temperature", 1, "metric") in alt
    assert quantity(crossing.features.crest, "height", 0, "metric") in alt
    assert "lapse rate from " in alt


@pytest.mark.parametrize(
    ("kinds", "words"),
    [
        (("measured",) * 3, "3 measured levels"),
        (("model",) * 4, "4 levels of a model column"),
        (("station", "between stations", "station"), "2 stations at different heights"),
        (("surface report blended in", "measured", "measured"), "2 measured levels under a fresh surface report"),
    ],
)
def test_profiles_are_not_called_assumed(crossing, kinds, words):
    known = with_origins(crossing, *kinds)
    heading = inputs(Spans(known, None), 4.7, float(freezing_level(known.incoming)), None).heading
    assert plain(heading, "metric").startswith(f"{words}: ")
    assert not any(ASSUMED in plain(one, "metric") for one in cautions(Spans(known, None), None).here)
    assert any(ASSUMED in plain(one, "metric") for one in cautions(Spans(crossing, None), None).here)


def test_findings_stand_in_a_table_the_gravest_first(page_for, crossing):
    found = (
        Finding("line 9", "gap", "900 m", "interpolated", "remark"),
        Finding("line 4", "spike <b>", "31 °C", "left out", "wrong"),
        Finding("line 5", "superadiabatic", "", "used as it is", "doubtful"),
    )
    page = page_for(crossing, findings=found)
    assert [finding.severity for finding in page.findings] == ["wrong", "doubtful", "remark"]
    html = render(page)
    table = html[html.index('<table id="findings">') :]
    assert table.index("line 4") < table.index("line 5") < table.index("line 9")
    assert "spike &lt;b&gt;" in table
    assert 'id="findings"' not in render(page_for(crossing))


def test_no_class_of_a_drawing_is_styled_for_two_things():
    """A fill for one figure would hide the stroke of another that goes by the same name."""
    from orolift.report.render import _environment

    style = _environment().globals["inlined"]["style.css"].text
    assert style.count("\n.met {") == 1
    assert style.count("\n.spell {") == 1
