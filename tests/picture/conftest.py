"""What several tests look at, made once."""

import pytest

from substrate.picture.figure import save_figures
from substrate.picture.report import write_report
from tests.picture.samples import hot_spot, lifetimes, wafer

MAKERS = {"hot spot": hot_spot, "lifetimes": lifetimes, "wafer": wafer}


@pytest.fixture(scope="session")
def folders(tmp_path_factory):
    """Folder of the figures of each sample."""
    out = {}
    for name, make in MAKERS.items():
        out[name] = tmp_path_factory.mktemp("figures")
        save_figures(make(), out[name])
    return out


@pytest.fixture(scope="session")
def pages(tmp_path_factory):
    """Text of the report of each sample, as it stands in the file."""
    folder = tmp_path_factory.mktemp("reports")
    return {name: write_report(make(), folder / f"{number}.html").read_text(encoding="utf-8") for number, (name, make) in enumerate(MAKERS.items())}
