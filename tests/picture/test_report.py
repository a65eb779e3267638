"""The report page: every number with its bar, unit and definition; nothing from outside; nothing of the user's unescaped."""

import re

import pytest

from substrate.picture.report import cautions, report_html, write_report
from tests.picture.samples import hot_spot, lifetimes, wafer


@pytest.mark.parametrize("make", [hot_spot, lifetimes, wafer])
def test_page_stands_alone(make, tmp_path):
    path = write_report(make(), tmp_path / "report.html")
    page = path.read_text(encoding="utf-8")
    assert "http" not in page.replace("http-equiv", "") and "<script" not in page and "<link" not in page
    assert page.count("<img") == page.count("data:image/png;base64,") >= 2


def test_every_number_has_bar_unit_and_definition():
    page = report_html(hot_spot())
    for named in hot_spot().points[0].quantities.values():
        for quantity in named.values():
            assert str(quantity).replace("nm^2", "nm²") in page
            assert quantity.definition in page
    assert "no error bar" in page  # the stack's share has none
    assert "812 ± 31" in page and "60.0 ± 1.0 nm²" in page


def test_user_text_is_escaped():
    page = report_html(hot_spot())
    assert "Gap &amp; &lt;spot&gt;" in page and "&lt;script&gt;" in page and "spot 1 is &lt;near&gt;" in page
    assert not re.search(r"<(spot|near|script)>", page)


def test_failed_points_are_shown_with_their_reason():
    page = report_html(lifetimes())
    assert "failed" in page and "the reason &amp; why" in page


def test_cautions_concern_the_case():
    assert any("IEC 60825-1" in text for text in cautions(hot_spot()))
    assert any("SEMI M53" in text for text in cautions(wafer()))
    assert not any("IEC 60825-1" in text for text in cautions(lifetimes()))
    assert not any("SEMI M53" in text for text in cautions(lifetimes()))
