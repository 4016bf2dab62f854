"""The first look over every scale, and the meshes made from it."""

import numpy as np
import pytest
from discrete_making import WALL, coefficients, problem

from specterm.discrete.elements import grid
from specterm.discrete.mesh import Mesh
from specterm.discrete.meshing import GROWTH, build, graded, resolve
from specterm.discrete.reduce import problem_of
from specterm.discrete.scan import energy_for, scan, semiclassical_count
from specterm.errors import PhysicsError
from specterm.language import parse
from specterm.model import build as ready_model
from specterm.spectrum.setting import setting, span_at


def mesh_of(text, energy):
    """Return the mesh the engine makes for states up to an energy."""
    ready = setting(problem(text))
    span = span_at(ready, energy)
    return build(ready.problem, ready.look, ready.coefficients, span, energy)


@pytest.mark.parametrize("width", [30.0, 1.0, 1e-2, 1e-4])
@pytest.mark.parametrize("place", [1234.5, -7.25e4, 3e-3])
def test_scan_finds_a_well(place, width):
    """A well far from the origin, or far narrower than its distance, is seen to its bottom within one per cent."""
    look = scan(problem(f"H = p^2 - 50*exp(-((x-({place}))/{width})^2); x in (-inf, inf)"))
    assert look.potential.min() == pytest.approx(-50, rel=1e-2)
    assert abs(look.x[np.argmin(look.potential)] - place) < 0.2 * width


def test_scan_is_ordered_and_inside():
    """Places ascend and lie strictly inside the domain."""
    look = scan(problem("H = p^2 - 1/x; x in (0, 3)"))
    assert (np.diff(look.x) > 0).all()
    assert look.x[0] > 0
    assert look.x[-1] < 3


def test_wave_number_and_decay():
    """Semiclassical rates are sqrt((E-V)/K) where allowed and sqrt((V-E)/K) where forbidden, else 0."""
    look = scan(problem("H = p^2/2 + x^2; x in (-5, 5)"))
    allowed = look.x**2 < 4
    expected = np.sqrt(2 * np.abs(4 - look.x**2))
    np.testing.assert_allclose(look.wave_number(4.0), np.where(allowed, expected, 0), rtol=1e-12)
    np.testing.assert_allclose(look.decay(4.0), np.where(allowed, 0, expected), rtol=1e-12)


def test_semiclassical_count():
    """For p^2 + x^2 the phase integral over pi is E/2 (area of an ellipse, recomputed here); energy_for inverts it."""
    look = scan(problem("H = p^2 + x^2; x in (-inf, inf)"))
    extra = np.zeros(len(look.x))
    counts = semiclassical_count(look, np.array([10.0, 100.0, 4000.0]), extra)
    np.testing.assert_allclose(counts, [5, 50, 2000], rtol=0.05)
    assert energy_for(look, 50, extra, 0.0, np.inf) == pytest.approx(100, rel=0.1)
    assert energy_for(look, 50, extra, 0.0, 20.0) == 20.0


@pytest.mark.parametrize("inner", ["log(x)", "sqrt(x)", "sqrt(x - 0.5)"])
def test_no_value_inside_is_refused_with_its_place(inner):
    """A potential that is no number somewhere in the domain is refused, and the place is told."""
    with pytest.raises(PhysicsError, match=r"(not a number at|singular near) -?\d"):
        scan(problem(f"H = p^2 + {inner}; x in (-1, 1)"))


@pytest.mark.parametrize("stiff", ["x", "sin(x)", "x^2 - 0.5"])
def test_stiffness_of_both_signs_is_refused(stiff):
    """A coefficient between the momenta that changes its sign inside is refused."""
    with pytest.raises(PhysicsError, match="one sign"):
        scan(problem(f"H = p*({stiff})*p + x^2; x in (-1, 2)"))


def test_jumps_fall_on_element_edges():
    """Every boundary between layers, and every kink, is a place of the mesh."""
    text = """layers x: thickness, V, m
    10 300 0.092
    7.25 0 0.067
    1.8 300 0.092
    5.4 0 0.067
    10 300 0.092
x in layers
H = p*(1/(2*m))*p + V + abs(x - 13.3)"""
    places = mesh_of(text, 200.0).places
    for corner in (0, 10, 17.25, 19.05, 24.45, 34.45, 13.3):
        assert np.abs(places - corner).min() < 1e-13


@pytest.mark.parametrize(
    "text",
    [
        "H = p^2 + x^4; x in (-inf, inf)",
        "H = p^2 - 2/x; x in (0, inf)",
        "H = p^2 - 50*exp(-((x-1234.5)/1e-3)^2) + 1e-9*x^2; x in (-inf, inf)",
        "H = p^2 + where(abs(x) < 1e-3, -1e6, 0) + 1e-4*x^2; x in (-inf, inf)",
    ],
)
def test_lengths_are_graded(text):
    """No element is more than `GROWTH` times as long as its neighbour."""
    lengths = mesh_of(text, -0.05 if "2/x" in text else 1.0).lengths
    ratios = lengths[1:] / lengths[:-1]
    assert ratios.max() <= GROWTH * (1 + 1e-9)
    assert ratios.min() >= (1 - 1e-9) / GROWTH


def test_grading_keeps_places():
    """Grading only adds places."""
    places = np.array([0.0, 1e-3, 1.0, 10.0])
    fresh = graded(places)
    assert np.isin(places, fresh).all()
    assert (fresh[1:] > fresh[:-1]).all()


@pytest.mark.parametrize("width", [0.3, 0.03, 0.003])
def test_resolve_splits_narrow_peaks(width):
    """A peak seen by a Gauss point is resolved: the rule then gives its exact integral, width sqrt(pi) (recomputed here)."""
    some = coefficients(lambda x: -100 * np.exp(-(((x - 1.25) / width) ** 2)))
    start = Mesh(np.concatenate([np.linspace(-10, 1.2, 9), [1.25], np.linspace(1.3, 10, 9)]), 12, WALL, WALL)
    mesh = resolve(start, some, 50.0)
    here = grid(mesh, some)
    assert here.potential.sum() == pytest.approx(-100 * width * np.sqrt(np.pi), rel=1e-9)
    near = np.abs(mesh.places[:-1] - 1.25) < width
    assert mesh.lengths[near].max() < 4 * width
    assert mesh.lengths.max() > 0.3


def test_what_the_scan_saw_is_resolved():
    """A well that no Gauss point of a mesh meets is resolved because the scan saw it, and only then."""
    text = "H = p^2 - 1e6*exp(-((x-3.21)/1e-3)^2) + x^2/1e4; x in (-20, 20)"
    ready = setting(problem(text))
    coarse = Mesh(np.linspace(-20, 20, 21), 12, WALL, WALL)
    assert len(resolve(coarse, ready.coefficients, 1.0 - ready.floor).places) == 21
    mesh = resolve(coarse, ready.coefficients, 1.0 - ready.floor, ready.look)
    here = grid(mesh, coefficients(lambda x: -1e6 * np.exp(-(((x - 3.21) / 1e-3) ** 2))))
    assert here.potential.sum() == pytest.approx(-1e3 * np.sqrt(np.pi), rel=1e-8)


def test_pole_met_by_a_mesh_is_refused():
    """Splitting towards a pole inside ends in a refusal that names its place."""
    with pytest.raises(PhysicsError, match=r"singular at 0\.3"):
        resolve(Mesh(np.linspace(-1, 1, 9), 12, WALL, WALL), coefficients(lambda x: 1 / (x - 0.3) ** 2), 1.0)


def test_too_many_elements_are_refused():
    """A mesh of more elements than allowed is refused before it is made, with the number."""
    with pytest.raises(PhysicsError, match="elements, more than"):
        mesh_of("H = p^2; x in (0, 1)", 1e14)


def test_dense_tables_get_low_orders(tmp_path):
    """Between the many knots of a table the order is lower: a cubic has nothing to offer to order 12."""
    x = np.linspace(-3, 3, 200)
    (tmp_path / "scan.csv").write_text("x,v\n" + "\n".join(f"{a!r},{a * a!r}" for a in x.tolist()))
    model = ready_model(parse('V = table("scan.csv", 1, 2); H = p^2 + V; x in (-3, 3)'), folder=tmp_path)
    ready = setting(problem_of(model))
    mesh = build(ready.problem, ready.look, ready.coefficients, span_at(ready, 9.0), 9.0)
    assert mesh.order == 6
    assert np.abs(mesh.places[:, None] - x).min(axis=0).max() < 1e-12
