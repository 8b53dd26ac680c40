"""What the figures draw, read off their shapes."""

from __future__ import annotations

import dataclasses
from collections import Counter

import pytest

from qcreport.analysis.result import CharacteristicResult, UnitValue
from qcreport.measurements import Censoring
from qcreport.plan.model import Groups
from qcreport.report.figure_apart import apart_panel, shown_pairs
from qcreport.report.figure_mark import answer_mark, pair_grid
from qcreport.report.figure_values import ordered_groups, values_panel
from qcreport.report.glyphs import lines_of, width_of
from qcreport.report.pairs import higher_first, widest_of_each_group
from qcreport.report.shapes import STYLES, Bar, Drawing, Label, Line, Outline, Ring
from qcreport.report.words import words_for

from .samples import LAP_SHEAR, characteristic

WORDS = words_for("en", Groups.BATCH)


def styles(drawing: Drawing) -> Counter[str]:
    return Counter(s.style for s in drawing.shapes)


def texts(drawing: Drawing) -> list[str]:
    return [s.text for s in drawing.shapes if isinstance(s, Label)]


def values(
    result: CharacteristicResult, keys: dict[str, str] | None = None, margin: str = "1.5 MPa"
) -> Drawing:
    return values_panel(result, decimals=2, keys=keys or {}, margin_text=margin, words=WORDS)


def apart(result: CharacteristicResult) -> Drawing:
    return apart_panel(result, decimals=2, words=WORDS)


def many(n: int) -> CharacteristicResult:
    data = {f"LB-{i:02d}": [20 + (i % 5) + x for x in (0.0, 0.4, 0.9, 1.3)] for i in range(n)}
    return characteristic(data, procedure="tamhane_t2")


def test_every_value_is_a_stroke_and_every_mean_a_wedge() -> None:
    found = styles(values(characteristic()))
    assert found["value"] == 32
    assert found["mean"] == 4
    assert found["row"] == 4
    assert found["ring"] == 0


def test_rows_stand_in_export_order_with_the_reference_first() -> None:
    result = characteristic(procedure="dunnett_unequal", reference="LC-2404")
    assert [g.label for g in ordered_groups(result)] == ["LC-2404", "LA-2403", "LB-2403", "LD-2404"]
    assert styles(values(result))["reference"] == 1
    assert styles(values(characteristic()))["reference"] == 0


def test_equal_values_are_stacked_and_not_drawn_over_each_other() -> None:
    tied = {**LAP_SHEAR, "LA-2403": [24.0, 24.0, 24.0, 23.0]}
    strokes = [s for s in values(characteristic(tied)).shapes if isinstance(s, Line) and s.style == "value"]
    at_24 = Counter(s.x1 for s in strokes[:4]).most_common(1)[0][0]
    feet = [s.y2 for s in strokes[:4] if s.x1 == at_24]
    heights = [s.y2 - s.y1 for s in strokes]
    assert len(set(feet)) == 3
    tall, *short = sorted(heights[:4], reverse=True)
    assert tall == 8.0
    assert short == [pytest.approx(short[0])] * 3
    assert min(abs(a - b) for a in feet for b in feet if a != b) > short[0]


def test_a_flagged_value_gets_a_ring_with_its_letter() -> None:
    result = characteristic(flagged=True)
    drawing = values(result, {result.flagged[0].cell: "a"})
    assert [type(s) for s in drawing.shapes].count(Ring) == 1
    assert "a" in texts(drawing)


@pytest.mark.parametrize(
    ("kind", "way"), [(Censoring.BELOW, -1), (Censoring.AT_LEAST, 1), (Censoring.NOT_DETECTED, -1)]
)
def test_a_value_known_only_by_a_limit_is_half_an_arrow(kind: Censoring, way: int) -> None:
    base = characteristic()
    unit = UnitValue(
        value=23.0, text="<23", decimals=2, sample=None, cells=("Results!C5",), censored=kind, marks=()
    )
    first = dataclasses.replace(
        base.groups[0],
        units=(unit,),
        mean=None,
        sd=None,
        minimum=None,
        maximum=None,
        median=None,
        censored=1,
        n=1,
    )
    drawing = values(dataclasses.replace(base, groups=(first, *base.groups[1:])))
    (arrow,) = [s for s in drawing.shapes if isinstance(s, Outline) and s.style == "arrow"]
    tip, foot = arrow.points[1], arrow.points[2]
    assert (tip[0] - foot[0]) * way > 0
    assert "known only by a limit" in drawing.title


def test_a_limit_far_off_is_an_arrow_at_the_edge_with_its_number() -> None:
    near, far = values(characteristic()), values(dataclasses.replace(characteristic(), lower_limit=2.0))
    assert (styles(near)["limit"], styles(near)["edge-arrow"]) == (1, 0)
    assert styles(near)["hatch"] > 5
    assert (styles(far)["limit"], styles(far)["edge-arrow"]) == (0, 1)
    assert "lower limit 2" in texts(far)


def test_the_margin_is_a_scale_bar_of_its_own_length() -> None:
    drawing = values(characteristic())
    (bar,) = [s for s in drawing.shapes if isinstance(s, Bar) and s.style == "scale"]
    ticks = {s.text: s.x for s in drawing.shapes if isinstance(s, Label) and s.text in ("22", "24")}
    assert bar.width == pytest.approx((ticks["24"] - ticks["22"]) / 2 * 1.5)
    assert styles(values(characteristic(margin=(None, None)), margin=""))["scale"] == 0


def test_only_a_pair_wholly_beyond_is_solid() -> None:
    lowered = {**LAP_SHEAR, "LD-2404": [v - 3 for v in LAP_SHEAR["LD-2404"]]}
    assert styles(apart(characteristic()))["beyond"] == 0
    assert styles(apart(characteristic(lowered)))["beyond"] == 3


def test_a_bar_is_grey_inside_the_corridor_and_white_outside() -> None:
    drawing = apart(characteristic())
    whites = [s for s in drawing.shapes if isinstance(s, Bar) and s.style == "outside"]
    greys = [s for s in drawing.shapes if isinstance(s, Bar) and s.style == "inside"]
    (corridor,) = [s for s in drawing.shapes if isinstance(s, Bar) and s.style == "corridor"]
    assert len(whites) == len(greys) == 6
    assert all(g.x + g.width <= corridor.x + corridor.width + 1e-9 for g in greys)
    assert texts(drawing).count("differs; margin open") == 3
    assert texts(drawing).count("within the margin") == 2


def test_without_a_margin_there_is_no_corridor_and_no_grey() -> None:
    found = styles(apart(characteristic(margin=(None, None))))
    assert (found["corridor"], found["inside"], found["outside"]) == (0, 0, 6)


def test_an_open_end_runs_to_the_edge() -> None:
    base = characteristic()
    pair = dataclasses.replace(base.pairs[0], upper=None, answer="not_settled")
    drawing = apart(dataclasses.replace(base, pairs=(pair,)))
    (bar,) = [s for s in drawing.shapes if isinstance(s, Bar) and s.style == "outside"]
    (axis,) = [s for s in drawing.shapes if isinstance(s, Line) and s.style == "axis" and s.x2 - s.x1 > 50]
    assert bar.x + bar.width == pytest.approx(axis.x2)


def test_pairs_without_intervals_show_their_estimate_only() -> None:
    base = characteristic()
    pairs = tuple(dataclasses.replace(p, lower=None, upper=None, answer="not_shown") for p in base.pairs)
    found = styles(apart(dataclasses.replace(base, pairs=pairs, margin=(None, None))))
    assert (found["estimate"], found["outside"], found["slit"]) == (6, 0, 0)


def test_with_a_reference_the_direction_is_kept() -> None:
    result = characteristic(procedure="dunnett_unequal", reference="LB-2403")
    assert "LD-2404 − LB-2403" in texts(apart(result))


@pytest.mark.parametrize("n", [2, 8, 9, 30])
def test_two_to_thirty_groups_are_drawn(n: int) -> None:
    result = many(n)
    shown = shown_pairs(result)
    assert len(shown) <= 30
    assert {x for p in shown for x in (p.first, p.second)} == {g.label for g in result.groups}
    for drawing in (values(result), apart(result), pair_grid(result, WORDS)):
        assert drawing.height < 740
        assert set(styles(drawing)) <= set(STYLES) | {"label", "number", "note"}
        assert all(0 <= s.x <= drawing.width for s in drawing.shapes if isinstance(s, Label))


def test_above_thirty_pairs_each_group_shows_its_most_serious_one_once() -> None:
    result = many(12)
    kept = widest_of_each_group(result)
    assert len(kept) == len(set(kept)) <= 12


def test_the_grid_holds_every_pair_once() -> None:
    result = many(10)
    found = styles(pair_grid(result, WORDS))
    legend = 4
    cells = found["beyond"] + found["outside"] + found["inside"]
    halves = sum(p.answer == "different" for p in result.pairs) + 1
    assert cells - halves == 45 + legend


def test_the_mark_is_eighteen_by_four_millimetres_and_says_what_it_shows() -> None:
    result = characteristic()
    view = higher_first(result.pairs[2], result)
    mark = answer_mark(view, log=False, title=WORDS.mark_alt(view.answer, view, 2))
    assert (mark.width / 72 * 25.4, mark.height / 72 * 25.4) == (
        pytest.approx(18, abs=0.02),
        pytest.approx(4, abs=0.02),
    )
    assert mark.title == "LA-2403 against LD-2404: 0.616 to 2.667, differs; margin open"
    empty = answer_mark(None, log=False, title=WORDS.mark_alt("not_compared", None, 2))
    assert empty.title == "not compared"
    assert styles(empty) == Counter({"row": 1})


def test_long_names_are_broken_and_keep_head_and_tail() -> None:
    first, second = lines_of("LB-2400 second mixing line after cleaning, kettle 17", 8.5, 80, 2)
    assert first.startswith("LB-2400")
    assert second.endswith("17")
    assert max(width_of(t, 8.5) for t in (first, second)) <= 80
    (one,) = lines_of("L" * 300, 8.5, 80, 1)
    assert width_of(one, 8.5) <= 80
    assert lines_of("", 8.5, 80, 2) == ("",)


def test_stacked_values_keep_a_height_that_can_be_read() -> None:
    data = {"LA-2403": [0.5, 0.5, 0.5, 0.7, 0.8, 0.9], "LB-2403": [0.5, 0.6, 0.7, 0.8, 0.9, 1.0]}
    drawing = values(characteristic(data))
    strokes = [s for s in drawing.shapes if isinstance(s, Line) and s.style == "value"]
    assert min(s.y2 - s.y1 for s in strokes) >= 4.9


def test_a_value_left_out_is_drawn_apart() -> None:
    base = characteristic()
    units = (dataclasses.replace(base.groups[0].units[0], marks=("left out",)), *base.groups[0].units[1:])
    groups = (dataclasses.replace(base.groups[0], units=units), *base.groups[1:])
    drawing = values(dataclasses.replace(base, groups=groups))
    assert len([s for s in drawing.shapes if isinstance(s, Line) and s.style == "left-out"]) == 1
