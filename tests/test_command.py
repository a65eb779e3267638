"""The command: what it prints, which files it leaves, and its exit codes."""

import io
import os
import subprocess
import sys
from pathlib import Path
from types import SimpleNamespace

import pytest

from substrate.command import ProgressLine, duration, main
from substrate.run.results import read_results

CASE = """
title = "Fake balls"
[stack]
host = "water"
films = [ {material = "gold", thickness_nm = 50} ]
[[particle]]
shape = "sphere"
material = "gold"
diameter_nm = 60
[light]
wavelength_nm = 633
[[ask]]
what = "cross sections"
"""
SERIES = CASE.replace("633", "[500, 600, 700]")


@pytest.fixture
def here(tmp_path, monkeypatch) -> Path:
    """An empty current directory with a case of one point and one of three."""
    monkeypatch.chdir(tmp_path)
    Path("one.toml").write_text(CASE, encoding="utf-8")
    Path("three.toml").write_text(SERIES, encoding="utf-8")
    return tmp_path


def test_run_leaves_its_files_and_prints_the_table(here, questions, pictures, capsys):
    assert main(["run", "one.toml"]) == 0
    out, err = capsys.readouterr()
    folder = here / "results" / "one"
    assert read_results(folder / "one.h5").complete
    assert (folder / "table.csv").read_text(encoding="utf-8").startswith("point,status,cross_sections/absorbed [nm^2]")
    assert (folder / "report.html").is_file()
    assert pictures == [("save_figures", Path("results/one/figures")), ("write_report", Path("results/one/report.html"))]
    assert out.startswith("Fake balls\n")
    assert ["work", "3798", "±", "38", "nm^2"] in [line.split() for line in out.splitlines()]
    assert "caution: a film is thin" in out
    assert all(str(Path("results/one") / name) in out for name in ("one.h5", "table.csv", "figures", "report.html"))
    assert err == ""  # no progress where nobody watches


def test_results_are_never_overwritten(here, questions, pictures):
    assert [main(["run", "one.toml", "--no-figures"]) for _ in range(3)] == [0, 0, 0]
    assert sorted(path.name for path in Path("results").iterdir()) == ["one", "one-2", "one-3"]
    assert "save_figures" not in [name for name, _ in pictures]


def test_quick_and_out_are_passed_on(here, questions, pictures, capsys):
    assert main(["run", "one.toml", "--quick", "--out", "elsewhere/x"]) == 0
    assert questions.calls[0].quick is True
    assert (here / "elsewhere" / "x" / "one.h5").is_file()
    assert ["work", "3798", "nm^2"] in [line.split() for line in capsys.readouterr().out.splitlines()]


def test_a_series_is_a_table_with_its_number_first(here, questions, pictures, capsys):
    assert main(["run", "three.toml"]) == 0
    lines = capsys.readouterr().out.splitlines()
    start = next(i for i, line in enumerate(lines) if "wavelength_nm" in line)
    assert lines[start].split()[:2] == ["wavelength_nm", "absorbed"]
    assert lines[start + 1].split() == ["nm^2"] * (len(lines[start].split()) - 1)
    assert [line.split()[0] for line in lines[start + 2 : start + 5]] == ["500", "600", "700"]
    assert all(len(line) <= 100 for line in lines)


def test_all_problems_of_a_wrong_case_exit_1(here, capsys):
    Path("wrong.toml").write_text(CASE.replace("633", "-1").replace("diameter_nm", "diametr_nm"), encoding="utf-8")
    for command in ("run", "check"):
        assert main([command, "wrong.toml"]) == 1
        out, err = capsys.readouterr()
        assert out == "" and err.startswith("2 problems:\n")
        assert "light.wavelength_nm: received -1" in err and "Did you mean 'diameter_nm'?" in err
    assert not Path("results").exists()


def test_faults_that_only_the_objects_know_are_told_before_anything_is_computed(here, questions, pictures, capsys):
    text = SERIES + "[[collector]]\nna = [1.2, 1.4, 1.45]\n[[emitter]]\nposition_nm = [0, 0, [10, 70]]\nwavelength_nm = 600\n"
    Path("wrong.toml").write_text(text.replace('"water"', "1.33"), encoding="utf-8")
    assert main(["run", "wrong.toml"]) == 1
    err = capsys.readouterr().err
    assert "received 1.4;" in err and "received 1.45;" in err and "received 1.2;" not in err
    assert "emitter[1].position_nm" in err and "inside of particle[1]" in err
    assert questions.calls == [] and not Path("results").exists()


def test_missing_files_exit_1(here, capsys):
    assert main(["run", "missing.toml"]) == 1
    assert main(["show", "missing.h5"]) == 1
    assert main(["report", "missing.h5"]) == 1
    err = capsys.readouterr().err
    assert err.count("\n") == 3 and "Traceback" not in err


def test_a_folder_that_cannot_be_written_exits_1(here, questions, pictures, capsys):
    Path("file").write_text("in the way", encoding="utf-8")
    assert main(["run", "one.toml", "--out", "file/below"]) == 1
    assert "Traceback" not in capsys.readouterr().err


def test_a_failed_point_exits_1_and_keeps_the_others(here, questions, pictures, capsys):
    questions.fail_at = {1: questions.wrong_input()}
    assert main(["run", "three.toml"]) == 1
    out = capsys.readouterr().out
    assert "failed: the emitter sits in a wall" in out
    assert [point.status for point in read_results("results/three/three.h5").points] == ["finished", "failed", "finished"]


def test_not_converged_exits_2_with_results(here, questions, pictures, capsys):
    from substrate.source.plane_wave import PlaneWave

    questions.fail_at = {0: questions.not_converged(PlaneWave(633.0))}
    assert main(["run", "one.toml"]) == 2
    out = capsys.readouterr().out
    assert "not converged: the residual is 1e-2 after 500 products" in out
    assert Path("results/one/report.html").is_file()


def test_missed_accuracy_exits_2_with_results(here, questions, pictures, capsys):
    questions.bar = 0.05
    assert main(["run", "one.toml"]) == 2
    assert "caution: the accuracy asked for of 2 % is not reached by" in capsys.readouterr().out


def test_interrupted_exits_3_and_the_same_command_goes_on(here, questions, pictures, capsys):
    questions.fail_at = {1: KeyboardInterrupt()}
    assert main(["run", "three.toml"]) == 3
    assert "interrupted: 1 of 3 points are kept" in capsys.readouterr().err
    assert main(["show", "results/three/three.h5"]) == 0
    assert "unfinished: 1 of 3 points" in capsys.readouterr().out
    assert main(["run", "three.toml"]) == 0
    assert "holds 1 of 3 points of this case already" in capsys.readouterr().out
    assert read_results("results/three/three.h5").complete and len(questions.calls) == 4
    assert [path.name for path in Path("results").iterdir()] == ["three"]


def test_show_and_report_read_the_file_again(here, questions, pictures, capsys):
    main(["run", "one.toml"])
    printed = capsys.readouterr().out
    assert main(["show", "results/one/one.h5"]) == 0
    assert printed.startswith(capsys.readouterr().out)
    pictures.clear()
    assert main(["report", "results/one/one.h5"]) == 0
    assert main(["report", "results/one/one.h5", "--out", "page.html"]) == 0
    assert pictures == [("write_report", Path("results/one/report.html")), ("write_report", Path("page.html"))]


def test_check_computes_nothing_and_draws_the_sample(here, questions, pictures, monkeypatch, capsys):
    from substrate.question import refine

    estimate = refine.Estimate(1.9, 9, 32768, 17157, 17_000_000, 4.0)
    monkeypatch.setattr(refine, "estimate", lambda *arguments: estimate)
    assert main(["check", "three.toml"]) == 0
    out = capsys.readouterr().out
    assert questions.calls == [] and pictures == [("save_sketch", Path("results/three-sketch.png"))]
    assert "points: 3" in out and "17157 occupied cells" in out and "17 MB" in out and "12 s" in out
    assert "light.wavelength_nm: 3 values, 500, 600, 700" in out


def test_materials(here, pictures, capsys):
    from substrate.medium.material import material_names

    assert main(["materials"]) == 0
    out = capsys.readouterr().out
    assert [line.split("  ")[0] for line in out.splitlines()] == list(material_names())
    assert main(["materials", "gold"]) == 0
    out = capsys.readouterr().out
    assert "gold" in out and "source:" in out and pictures == [("save_material_plot", Path("results/materials/gold.png"))]
    assert main(["materials", "golt"]) == 1
    assert "gold" in capsys.readouterr().err


@pytest.mark.parametrize("arguments", [["--help"], ["run", "--help"], ["--version"]])
def test_help_and_version_exit_0(arguments, capsys):
    with pytest.raises(SystemExit) as leaving:
        main(arguments)
    assert leaving.value.code == 0
    assert "substrate" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("arguments", "heavy"),
    [
        (["--help"], {"numpy", "scipy", "numba", "matplotlib", "h5py", "mpmath"}),
        (["run", "--help"], {"numpy", "scipy", "numba", "matplotlib", "h5py", "mpmath"}),
        (["run", "missing.toml"], {"numpy", "scipy", "numba", "matplotlib", "h5py", "mpmath"}),
        (["run", "wrong.toml"], {"scipy", "numba", "matplotlib", "h5py", "mpmath"}),  # the check of materials may need numpy
        (["check", "wrong.toml"], {"scipy", "numba", "matplotlib", "h5py", "mpmath"}),
    ],
)
def test_quick_answers_load_nothing_heavy(here, arguments, heavy):
    """What makes an answer fast: counted in modules, not in seconds."""
    Path("wrong.toml").write_text("[light]\nwavelength_nm = -1\n", encoding="utf-8")
    code = f"""
import sys
from substrate.command import main
try:
    main({arguments!r})
except SystemExit:
    pass
loaded = {sorted(heavy)!r}
print("loaded:", [name for name in loaded if name in sys.modules])
"""
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "loaded: []"


def test_the_package_runs_as_a_module():
    done = subprocess.run([sys.executable, "-m", "substrate", "run", os.devnull], capture_output=True, text=True)
    assert done.returncode == 1 and "ask: received nothing" in done.stderr


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def event(done: float, left: float | None = 100.0):
    return SimpleNamespace(done=done, point=2, points=5, stage="solving", seconds_left=left)


def test_progress_waits_some_seconds_and_cleans_up():
    now = [0.0]
    screen = Terminal()
    line = ProgressLine(screen, clock=lambda: now[0])
    now[0] = 1.0
    line(event(0.1))
    assert screen.getvalue() == ""
    now[0] = 4.0
    line(event(0.2))
    assert screen.getvalue() == "\r 20 %, point 2 of 5, solving, about 2 min left"
    now[0] = 4.1
    line(event(0.3))  # too soon after the last one
    assert "30 %" not in screen.getvalue()
    line.clear()
    assert screen.getvalue().endswith(" \r")


def test_progress_is_for_terminals_only():
    now = [0.0]
    stream = io.StringIO()
    line = ProgressLine(stream, clock=lambda: now[0])
    now[0] = 10.0
    line(event(0.5))
    line.clear()
    assert stream.getvalue() == ""


@pytest.mark.parametrize(("seconds", "words"), [(0.2, "1 s"), (45.0, "45 s"), (100.0, "2 min"), (3000.0, "50 min"), (9000.0, "2.5 h")])
def test_durations(seconds, words):
    assert duration(seconds) == words
