"""The geometry of the three panels: gaps, ticks, bands, lanes, and what both drawings read."""

import datetime as dt
import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from clinic.chart import EyeGiven, EyeMark, LimitPiece, Reading, panels_for
from clinic.chart.figure import figure
from clinic.chart.spoken import spoken
from clinic.chart.time_axis import time_axis
from clinic.chart.value_axis import value_axis

DAY = dt.date(2025, 1, 6)


def on(week: int) -> dt.date:
    return DAY + dt.timedelta(weeks=week)


def scan(week: int, um: float, method: str | None = "SD-BM", **more: object) -> Reading:
    return Reading(on(week), um, f"{um:g} µm", method, **more)  # type: ignore[arg-type]


def eye(*scans: Reading, side: str = "R", **more: object) -> EyeGiven:
    return EyeGiven(side, tuple(scans), **more)  # type: ignore[arg-type]


def segments(one: EyeGiven, panel: str = "cst") -> list[list[float]]:
    (series,) = panels_for(one).panel(panel).series
    return [[point.at for point in segment] for segment in series.segments]


def test_readings_of_one_method_are_one_line() -> None:
    assert segments(eye(scan(0, 300), scan(4, 310), scan(8, 320))) == [[300, 310, 320]]


def test_readings_are_drawn_in_order_of_day_however_they_come() -> None:
    assert segments(eye(scan(8, 320), scan(0, 300), scan(4, 310))) == [[300, 310, 320]]


def test_another_method_begins_a_new_line() -> None:
    drawn = segments(eye(scan(0, 300), scan(4, 270, "SS"), scan(8, 280, "SS"), scan(12, 310)))
    assert drawn == [[300], [270, 280], [310]]


def test_an_unknown_method_is_joined_with_nothing() -> None:
    assert segments(eye(scan(0, 300, None), scan(4, 310, None))) == [[300], [310]]


def test_an_event_that_breaks_the_panel_cuts_the_line_even_on_the_day_of_a_reading() -> None:
    surgery = EyeMark(on(4), "cataract surgery", ("cst", "letters"))
    assert segments(eye(scan(0, 300), scan(4, 310), scan(8, 320), events=(surgery,))) == [
        [300],
        [310],
        [320],
    ]
    before = EyeMark(on(2), "cataract surgery", ("cst",))
    assert segments(eye(scan(0, 300), scan(4, 310), scan(8, 320), events=(before,))) == [
        [300],
        [310, 320],
    ]


def test_an_event_that_breaks_another_panel_does_not_cut_this_one() -> None:
    event = EyeMark(on(2), "capsulotomy", ("letters",))
    assert segments(eye(scan(0, 300), scan(4, 310), events=(event,))) == [[300, 310]]


def test_a_provisional_reading_stands_beside_the_line_and_does_not_break_it() -> None:
    one = eye(scan(0, 300), scan(4, 500, provisional=True), scan(8, 320))
    (series,) = panels_for(one).panel("cst").series
    assert [[point.at for point in segment] for segment in series.segments] == [[300, 320]]
    assert [(point.at, point.hollow) for point in series.loose] == [(500, True)]


def test_a_reading_without_an_amount_is_not_drawn_at_zero() -> None:
    assert segments(eye(scan(0, 300), Reading(on(4), None, "", "SD-BM"), scan(8, 320))) == [
        [300, 320]
    ]


def test_off_the_chart_has_its_rows_under_the_letters_and_is_never_joined() -> None:
    off = Reading(on(4), None, "hand movements", None, off_chart="HM")
    one = EyeGiven(
        "L",
        letters=(
            Reading(on(0), 3, "3 letters", "etdrs"),
            off,
            Reading(on(8), 0, "0 letters", "etdrs"),
        ),
    )
    panel = panels_for(one).panel("letters")
    assert panel.band is not None
    assert [row.label for row in panel.band.rows] == ["CF", "HM", "LP", "NLP"]
    heights = [row.at for row in panel.band.rows]
    assert heights == sorted(heights, reverse=True)
    (series,) = panel.series
    assert len(series.segments) == 3
    drawn = {point.shown: point.at for point in series.points}
    assert drawn["hand movements"] == heights[1]
    assert drawn["0 letters"] == 0 > panel.band.high > heights[0]


def test_without_an_off_chart_acuity_there_is_no_band() -> None:
    assert panels_for(eye(scan(0, 300))).panel("letters").band is None


def test_error_bars_are_the_handed_in_repeatability_and_fit_on_the_axis() -> None:
    panel = panels_for(eye(scan(0, 300, error=20.0), scan(4, 520, error=20.0))).panel("cst")
    (series,) = panel.series
    assert [(point.low, point.high) for point in series.points] == [(280, 320), (500, 540)]
    assert panel.axis.low <= 280
    assert panel.axis.high >= 540


def test_a_bar_of_letters_stops_at_the_hundred_letters_of_the_scale() -> None:
    one = EyeGiven("R", letters=(Reading(on(0), 95, "95 letters", "etdrs", error=9.0),))
    panel = panels_for(one).panel("letters")
    assert [(point.low, point.high) for point in panel.series[0].points] == [(86, 100)]
    assert panel.axis.high <= 110


def test_limit_lines_keep_their_stretch_and_fit_on_the_axis() -> None:
    pieces = (LimitPiece(305, "limit", None, on(4)), LimitPiece(260, "other", on(4), None))
    chart = panels_for(eye(scan(0, 400), scan(8, 420), limits=pieces))
    one, other = chart.panel("cst").limits
    assert (one.first, one.last, one.at) == (chart.time.first, on(4), 305)
    assert (other.first, other.last, other.at) == (on(4), chart.time.last, 260)
    assert chart.panel("cst").axis.low <= 260
    assert chart.panel("letters").limits == ()


def test_two_eyes_share_one_time_axis_and_name_their_lanes() -> None:
    right = eye(scan(0, 300), treatments=(EyeMark(on(0), "ranibizumab"),))
    left = eye(scan(30, 400), side="L", treatments=(EyeMark(on(30), "ranibizumab"),))
    chart = panels_for(right, left)
    assert chart.time.first < on(0)
    assert chart.time.last > on(30)
    assert [lane.words for lane in chart.lanes] == [
        "Right eye: ranibizumab",
        "Left eye: ranibizumab",
    ]
    assert [series.side for series in chart.panel("cst").series] == ["R", "L"]


def test_one_lane_an_agent_and_one_a_kind_of_event() -> None:
    marks = tuple(EyeMark(on(n), words) for n, words in enumerate(("a", "b", "a")))
    chart = panels_for(eye(scan(0, 300), treatments=marks, events=(EyeMark(on(1), "laser"),)))
    assert [(lane.words, lane.kind, len(lane.days)) for lane in chart.lanes] == [
        ("a", "treatment", 2),
        ("b", "treatment", 1),
        ("laser", "event", 1),
    ]


def test_an_eye_without_any_date_still_has_a_chart() -> None:
    chart = panels_for(EyeGiven("R"), today=DAY)
    assert all(panel.empty for panel in chart.panels)
    assert chart.time.first < DAY < chart.time.last
    assert "no readings" in spoken(chart)


@given(st.dates(dt.date(1990, 1, 1), dt.date(2080, 1, 1)), st.integers(0, 15_000))
def test_every_tick_names_its_year_lies_on_the_axis_and_they_are_few(
    first: dt.date, span: int
) -> None:
    axis = time_axis([first, first + dt.timedelta(days=span)])
    assert axis.first < first
    assert 2 <= len(axis.ticks) <= 9
    for tick in axis.ticks:
        assert axis.first <= tick.day <= axis.last
        assert str(tick.day.year) in tick.label
    labels = [tick.label for tick in axis.ticks]
    assert len(set(labels)) == len(labels)


@given(st.lists(st.floats(0, 1500, allow_nan=False), min_size=1, max_size=30), st.integers(1, 200))
def test_a_value_axis_holds_every_height_and_is_never_negative(
    heights: list[float], least: int
) -> None:
    axis = value_axis(heights, least)
    assert axis.low >= 0
    assert axis.low <= min(heights) <= max(heights) <= axis.high
    assert axis.high - axis.low >= least * 0.999
    assert 3 <= len(axis.ticks) <= 9


@pytest.mark.parametrize(
    ("days", "label"), [(20, "13 Jan 2025"), (200, "Mar 2025"), (4000, "2028")]
)
def test_ticks_are_weeks_months_or_years_by_span(days: int, label: str) -> None:
    axis = time_axis([dt.date(2025, 1, 6), dt.date(2025, 1, 6) + dt.timedelta(days=days)])
    assert label in [tick.label for tick in axis.ticks]


def test_the_screen_figure_is_plain_json_and_leaves_a_hole_at_each_gap() -> None:
    one = eye(scan(0, 300), scan(4, 270, "SS"), limits=(LimitPiece(305, "limit"),))
    made = figure(panels_for(one))
    assert json.loads(json.dumps(made)) == made
    (line,) = [
        trace for trace in made["data"] if trace["name"] == "Right eye" and 300 in trace["y"]
    ]
    assert line["y"] == [300, None, 270]
    assert line["connectgaps"] is False
    assert line["x"] == ["2025-01-06", None, "2025-02-03"]


def test_words_from_people_are_not_read_as_tags_on_the_screen() -> None:
    one = eye(scan(0, 300, method="<a href='http://x'>"), treatments=(EyeMark(DAY, "<b>x"),))
    text = json.dumps(figure(panels_for(one)))
    assert "<a" not in text
    assert "<b>" not in text
    assert "&lt;b&gt;x" in text


def test_the_chart_in_words_tells_first_last_lowest_highest_and_gaps() -> None:
    one = eye(
        scan(0, 300),
        scan(4, 420),
        scan(8, 270, "SS"),
        treatments=(EyeMark(on(0), "ranibizumab"), EyeMark(on(4), "ranibizumab")),
        limits=(LimitPiece(305, "center-involved"),),
    )
    said = spoken(panels_for(one))
    assert (
        "Right eye, CST: 3 readings from 300 µm on 6 Jan 2025 to 270 µm on 3 Mar 2025, "
        "lowest 270 µm, highest 420 µm, 1 gap where readings are not comparable." in said
    )
    assert "ranibizumab: 2 times, last on 3 Feb 2025." in said
    assert "Limit line at 305 µm: center-involved." in said
