"""The Python face: what answers hold, and what is refused."""

import numpy as np
import pytest

import substrate as sb
from substrate.solve import problem

STACK = sb.Stack("air", [sb.Film("silica", 100.0)], "silicon")
BALL = sb.Sphere(material="polystyrene", diameter_nm=80.0)
LIGHT = sb.PlaneWave(wavelength_nm=500.0, angle_deg=60.0, polarization="p")
FAST = {"quick": True, "cell_nm": 10.0}


def test_quick_answers_have_no_bars_and_full_ones_do():
    quick = sb.scatter(STACK, [BALL], LIGHT, **FAST)
    assert quick.work.error is None and "no error bar" in str(quick) and quick.convergence == {}
    full = sb.scatter(STACK, [BALL], LIGHT, [sb.Collector(na=0.9)], cell_nm=8.0, spots_nm=[(0, 0, 100)])
    for quantity in full.quantities().values():
        assert quantity.error is not None and quantity.definition
    assert full.collected["objective"].unit == "nm^2" and len(full.convergence["work"].values) == 9
    assert "<table>" in full._repr_html_() and "±" in str(full)
    assert abs(full.work.value - quick.work.value) < 0.1 * full.work.value


def test_unpolarized_is_the_mean_of_s_and_p():
    parts = [sb.scatter(STACK, [BALL], sb.PlaneWave(500.0, 60.0, polarization=p), **FAST) for p in ("s", "p")]
    mixed = sb.scatter(STACK, [BALL], sb.PlaneWave(500.0, 60.0, polarization="unpolarized"), **FAST)
    assert mixed.up.value == pytest.approx(0.5 * sum(part.up.value for part in parts), rel=1e-9)
    point = [(60.0, 0.0, 40.0)]
    assert mixed.intensity(point)[0] == pytest.approx(np.mean([part.intensity(point)[0] for part in parts]), rel=1e-9)
    with pytest.raises(sb.InputError, match="intensity"):
        mixed.field(point)


def test_circular_light_does_as_much_as_unpolarized_on_a_sphere():
    """s and p fields of a sphere in the plane of incidence are mirror images of different kind: powers do not interfere."""
    circular = sb.scatter(STACK, [BALL], sb.PlaneWave(500.0, 60.0, polarization="circular"), **FAST)
    mixed = sb.scatter(STACK, [BALL], sb.PlaneWave(500.0, 60.0, polarization="unpolarized"), **FAST)
    assert circular.work.value == pytest.approx(mixed.work.value, rel=1e-4)  # residual


def test_turning_sample_and_light_together_changes_nothing():
    rod = {"material": 1.8, "diameter_nm": 40.0, "length_nm": 90.0}
    along = sb.scatter(STACK, [sb.Rod(**rod)], sb.PlaneWave(500.0, 60.0, 0.0), **FAST)
    across = sb.scatter(STACK, [sb.Rod(**rod, azimuth_deg=90.0)], sb.PlaneWave(500.0, 60.0, 90.0), **FAST)
    assert across.up.value == pytest.approx(along.up.value, rel=3e-4)  # fill quadrature differs between x and y


def test_shifting_the_sample_sideways_changes_no_power():
    here = sb.scatter(STACK, [BALL], LIGHT, **FAST)
    there = sb.scatter(STACK, [sb.Sphere(material="polystyrene", diameter_nm=80.0, center_xy_nm=(400.0, -130.0))], LIGHT, **FAST)
    assert there.up.value == pytest.approx(here.up.value, rel=1e-6)
    assert there.stack.value == pytest.approx(here.stack.value, rel=1e-5)


def test_two_distant_particles_scatter_twice_as_much_at_most_interfering():
    """Absorbed powers of far-apart weak absorbers add up."""
    one = sb.Sphere(material=1.3 + 0.2j, diameter_nm=20.0)
    two = [one, sb.Sphere(material=1.3 + 0.2j, diameter_nm=20.0, center_xy_nm=(160.0, 0.0))]
    light = sb.PlaneWave(500.0, 0.0, polarization="s")
    single = sb.scatter(sb.Stack(1.0, [], 1.5), [one], light, quick=True, cell_nm=2.5)
    both = sb.scatter(sb.Stack(1.0, [], 1.5), two, light, quick=True, cell_nm=2.5)
    assert both.absorbed.value == pytest.approx(2.0 * single.absorbed.value, rel=5e-3)  # each scatters 1e-3 onto the other


def test_shell_of_the_hosts_index_is_not_there():
    bare = sb.scatter(STACK, [sb.Sphere(material="polystyrene", diameter_nm=80.0, gap_nm=10.0)], LIGHT, quick=True, cell_nm=5.0)
    coat = sb.Shell(around=sb.Sphere(material="polystyrene", diameter_nm=80.0), material="air", thickness_nm=10.0)
    coated = sb.scatter(STACK, [coat], LIGHT, quick=True, cell_nm=5.0)
    assert coated.up.value == pytest.approx(bare.up.value, rel=2e-3)  # the air of the shell is 1.0003 of vacuum's 1... the cells are the same
    assert coated.work.value == pytest.approx(bare.work.value, rel=2e-3)


def test_index_matched_base_leaves_the_free_particle():
    """Base and film of the host's index: the same numbers as without any stack, and work = absorbed + up + down."""
    matched = sb.scatter(sb.Stack(1.33, [sb.Film(1.33, 30.0)], 1.33), [BALL], LIGHT, **FAST)
    nearly = sb.scatter(sb.Stack(1.33, [sb.Film(1.33, 30.0)], 1.33 + 1e-7), [BALL], LIGHT, **FAST)
    assert nearly.work.value == pytest.approx(matched.work.value, rel=1e-5)
    assert matched.work.value == pytest.approx(matched.absorbed.value + matched.up.value + matched.down.value, rel=1e-4)


def test_bare_stack_field_needs_no_particle():
    out = sb.scatter(STACK, [], LIGHT, spots_nm=[(0, 0, 50)])
    assert out.method == "exact, plane stack" and out.work.value == 0.0
    assert out.spots[0].value == pytest.approx(out.intensity([(0, 0, 50)])[0])


def test_an_iteration_that_does_not_converge_keeps_its_best(monkeypatch):
    monkeypatch.setattr(problem.Problem.solve, "__defaults__", (3, None))
    with pytest.raises(sb.NotConverged, match="3 products were spent") as caught:
        sb.scatter(STACK, [sb.Sphere(material="gold", diameter_nm=60.0)], LIGHT, **FAST)
    best = caught.value.best
    assert best.work.error is None and np.isfinite(best.work.value) and best.reports[-1].residual > 1e-3


def test_emission_answers():
    emitter = sb.Emitter(position_nm=(0, 0, 20), orientation="isotropic", wavelength_nm=600.0, quantum_yield=0.5, lifetime_ns=4.0)
    out = sb.emit(STACK, [], emitter, [sb.Collector(na=0.8)])
    rate = 0.5 + 0.5 * out.total.value
    assert out.lifetime_ns.value == pytest.approx(4.0 / rate) and out.lifetime_ratio.value == pytest.approx(1.0 / rate)
    assert out.quantum_yield.value == pytest.approx(0.5 * out.up.value / rate)
    assert out.collected["objective"].value < out.up.value and out.down.value == 0.0
    parts = [sb.emit(STACK, [], sb.Emitter((0, 0, 20), 600.0, o)).total.value for o in ("vertical", "horizontal")]
    assert out.total.value == pytest.approx((parts[0] + 2 * parts[1]) / 3)
    assert "lifetime_ns" in str(out) and "<table>" in out._repr_html_()


def test_emitters_in_or_on_particles_are_refused():
    for z, words in ((40.0, "inside of a particle"), (80.2, "0.2 nm from a particle")):
        with pytest.raises(sb.InputError, match=words):
            sb.emit(STACK, [BALL], sb.Emitter((0, 0, z), 600.0), **FAST)


@pytest.mark.parametrize(
    "ask,words",
    [
        (lambda: sb.scatter(STACK, [BALL], LIGHT, [sb.Collector(na=1.2)]), "at most 1.00028|index of the host"),
        (lambda: sb.scatter(STACK, [BALL], LIGHT, [sb.Collector(na=0.5, side="below")]), "absorbing half-space"),
        (lambda: sb.scatter(STACK, [BALL], sb.PlaneWave(500.0, side="below")), "lossy half-space"),
        (lambda: sb.scatter(STACK, [BALL], LIGHT, [sb.Collector(na=0.5), sb.Collector(na=0.6)]), "a name of its own"),
        (lambda: sb.scatter(STACK, [BALL], LIGHT, spots_nm=[(0, 0, -1)]), "z >= 0"),
        (lambda: sb.scatter(STACK, [BALL], sb.PlaneWave(300.0)), "never extrapolated"),
        (lambda: sb.scatter(STACK, [BALL], LIGHT, accuracy=3), "between 0 and 1"),
    ],
)
def test_refusals(ask, words):
    with pytest.raises(sb.InputError, match=words):
        ask()


def test_progress_runs_from_nothing_to_all():
    events = []
    sb.scatter(STACK, [BALL], LIGHT, cell_nm=16.0, progress=events.append)
    done = [event.done for event in events]
    assert done == sorted(done) and done[-1] == 1.0 and {"meshing", "solving", "done"} == {event.stage for event in events}


@pytest.mark.parametrize("gap", [500.0, 1000.0])
def test_twin_guides_close_the_balance(gap):
    stack = sb.Stack(1.45, [sb.Film(2.0, 200.0), sb.Film(1.45, gap), sb.Film(2.0, 200.0)], 1.45)
    out = sb.emit(stack, [], sb.Emitter((0, 0, 20), 600.0, "isotropic"))
    assert abs(out.balance.value) < 1e-7 and out.warnings == ()  # residues of poles 1e-5 apart


def test_a_balance_that_does_not_close_is_told_and_widens_the_bars():
    """Twin guides so far apart that their modes cannot be told apart in double precision: the power that is missing is named."""
    stack = sb.Stack(1.45, [sb.Film(2.0, 200.0), sb.Film(1.45, 3000.0), sb.Film(2.0, 200.0)], 1.45)
    out = sb.emit(stack, [], sb.Emitter((0, 0, 20), 600.0, "isotropic"))
    assert abs(out.balance.value) > 1e-6 and any("power balance misses" in text for text in out.warnings)
    assert out.up.error > 1e-3 * out.up.value


def test_loss_too_small_to_matter_leaves_guided_and_downward_light():
    """k = 1e-8 in film or base: the same channels as without any."""
    emitter = sb.Emitter((0, 0, 20), 600.0, "isotropic")
    clean = sb.emit(sb.Stack(1.0, [sb.Film(2.0, 200.0)], 1.45), [], emitter)
    tiny = sb.emit(sb.Stack(1.0, [sb.Film(2.0 + 1e-8j, 200.0)], 1.45 + 1e-8j), [], emitter)
    assert tiny.guided.value == clean.guided.value and tiny.down.value == clean.down.value > 0.0


def test_field_in_the_hollow_of_a_shell():
    """A core of exactly the host's index has no dipoles; its field is that of a core of nearly that index."""
    def centre(core):
        body = sb.Shell(around=sb.Sphere(material=core, diameter_nm=60.0), material=1.5, thickness_nm=10.0)
        return sb.scatter(sb.Stack(1.0, [], 1.5), [body], sb.PlaneWave(600.0), spots_nm=[(0, 0, 40)], quick=True, cell_nm=5.0).spots[0].value

    assert centre(1.0) == pytest.approx(centre(1.0001), rel=2e-3) and centre(1.0) > 0.1


def test_grids_too_coarse_for_bars_and_emitters_too_near_the_surface():
    coarse = sb.scatter(STACK, [BALL], LIGHT, cell_nm=16.0)
    assert coarse.work.error is None and any("no bars are given" in text for text in coarse.warnings)
    with pytest.raises(sb.InputError, match="at most the smallest extent"):
        sb.scatter(STACK, [BALL], LIGHT, cell_nm=100.0)
    with pytest.raises(sb.InputError, match="at least 0.5 nm over an absorbing"):
        sb.emit(sb.Stack("air", [], "gold"), [], sb.Emitter((0, 0, 0.3), 600.0))
    assert any("local bulk optics" in text for text in sb.emit(STACK, [], sb.Emitter((0, 0, 0.8), 600.0)).warnings)
