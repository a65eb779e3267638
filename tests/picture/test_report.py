"""The report page: every number with its bar, unit and definition; nothing from outside; nothing of the user's unescaped."""

import re
from dataclasses import replace

import pytest

from substrate.picture import report
from substrate.picture.cautions import cautions
from substrate.picture.report import report_html
from substrate.picture.words import parameter_words, quantity_text
from substrate.quantity import Quantity
from tests.picture.conftest import MAKERS
from tests.picture.samples import hot_spot, lifetimes, wafer


@pytest.fixture
def no_figures(monkeypatch):
    """Pages without pictures, for tests of words only."""
    monkeypatch.setattr(report, "pictures", lambda results: iter(()))


@pytest.mark.parametrize("name", MAKERS)
def test_page_stands_alone(name, pages):
    page = pages[name]
    assert "http" not in page and "<script" not in page and "<link" not in page and "url(" not in page
    assert page.count("<img") == page.count("data:image/png;base64,") >= 2
    assert "name='viewport'" in page and "@media print" in page


@pytest.mark.parametrize("name", MAKERS)
def test_every_number_has_bar_unit_and_definition(name, pages):
    for point in MAKERS[name]().points:
        for named in point.quantities.values():
            for quantity in named.values():
                assert str(quantity).replace("nm^2", "nm²") in pages[name]
                assert quantity.definition in pages[name]


def test_numbers_as_they_are_printed(pages):
    page = pages["hot spot"]
    assert "<td class='value'>812 ± 31</td>" in page and "60.0 ± 1.0 nm²" in page
    assert "10 nm² (no error bar)" in page  # the stack's share has none
    assert "Cross sections, balance: closure (0.1 ± 1.0)e-5" in page


def test_user_text_is_escaped(pages):
    page = pages["hot spot"]
    assert "Gap &amp; &lt;spot&gt;" in page and "&lt;script&gt;" in page and "spot 1 is &lt;near&gt;" in page
    assert not re.search(r"<(spot|near|script)>", page)


def test_the_case_is_there_verbatim(pages):
    assert "<pre>title = &#x27;made up&#x27;\n[stack]\nhost = &#x27;&lt;script&gt;&#x27;\n</pre>" in pages["hot spot"]


def test_failed_points_are_shown_with_their_reason(pages):
    page = pages["lifetimes"]
    assert "<td class='value'>failed</td>" in page and "failed. the reason &amp; why" in page and "1 of 12 points failed" in page
    assert "<td class='point'>diameter 150 nm, polarization s (not converged)</td>" in pages["wafer"]
    assert "not converged. the iteration stopped at 1e-3" in pages["wafer"]


def test_unfinished_runs_say_so(no_figures):
    results = wafer()
    assert "Unfinished: 8 of 20 points" in report_html(replace(results, planned_points=20))
    assert "Unfinished" not in report_html(results)
    assert "No point is finished" in report_html(replace(results, points=(), planned_points=8))


def test_warnings_come_once_with_their_number(no_figures):
    results = wafer()
    points = [replace(point, warnings=("doubtful",)) if i < 3 else point for i, point in enumerate(results.points)]
    page = report_html(replace(results, points=tuple(points)))
    assert page.count("doubtful") == 1 and "doubtful (3 of 8 points)" in page


def test_materials_have_source_and_range(pages):
    assert "<td>silicon</td><td>400 to 800 nm</td><td class='words'>A. Author, J. Made-up 1, 1 (1900). crystal</td>" in pages["wafer"]


def test_cautions_concern_the_case():
    def called(results, words):
        return any(words in text for text in cautions(results))

    assert called(hot_spot(), "IEC 60825-1") and not called(lifetimes(), "IEC 60825-1")
    assert called(wafer(), "SEMI M53") and not called(lifetimes(), "SEMI M53")
    assert called(wafer(), "NIOSH 2012-147") and not called(replace(wafer(), sketch=replace(wafer().sketch, outlines=[])), "NIOSH")
    assert called(hot_spot(), "largest value of a map") and not called(wafer(), "largest value of a map")
    assert called(lifetimes(), "Lifetimes and yields") and not called(wafer(), "Lifetimes and yields")
    assert all(called(make(), "local bulk optical constants") for make in MAKERS.values())


def test_a_long_series_is_summed_up_before_the_table_of_all_points(no_figures):
    results = lifetimes()
    points = [replace(point, parameters={"emitter[1].position_nm.z": 5.0 + i}) for i, point in enumerate(results.points + results.points)]
    page = report_html(replace(results, points=tuple(points), planned_points=24))
    summary, _, table = page.partition("<h2>All points</h2>")
    assert "<th>smallest</th><th>largest</th>" in summary and table.count("<td class='point'>") == 24
    assert "36.78 ± 0.37<br><span class='small'>position z 5 nm</span>" in summary
    assert "<h2>All points</h2>" not in report_html(results)  # twelve points fit into the answer


def test_bars_too_small_to_read_are_told_by_their_size():
    assert quantity_text(Quantity(1.3383923163, 1.4e-9, "1", "")) == "1.338392 ± 1e-09"
    assert quantity_text(Quantity(2.0, float("nan"), "nm^2", "")) == "2 nm² (no error bar)"
    assert quantity_text(Quantity(2.0, 0.1, "nm^2", "")) == "2.00 ± 0.10 nm²"


@pytest.mark.parametrize(
    "key, words",
    [
        ("emitter[1].position_nm.z", ("emitter 1: position z", "nm")),
        ("stack.films[2].thickness_nm", ("film 2: thickness", "nm")),
        ("light.angle_deg", ("light: angle", "deg")),
        ("collector[1].polar_deg[2]", ("collector 1: polar 2", "deg")),
        ("light.polarization", ("light: polarization", "")),
        ("particle[1].diameter_nm", ("particle 1: diameter", "nm")),
    ],
)
def test_series_parameters_in_words(key, words):
    assert parameter_words(key) == words
