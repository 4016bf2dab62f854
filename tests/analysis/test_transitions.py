"""Lines between levels: sums, signs, populations, degenerate cases."""

import math

import numpy as np
import pytest
from analysis_making import model, spectrum

from specterm.analysis import solve
from specterm.analysis.matrix_elements import matrix_elements
from specterm.analysis.transitions import into_other, populations, transitions
from specterm.errors import PhysicsError, SheetError

OSCILLATOR = "H = p^2/(2*m) + x^2/2\nm = 2.5\nx in (-inf, inf)"
WALLS = "H = p^2/2\nx in (0, 1)"


def lines(text, start=0, count=12, **options):
    """Return the lines from one level of a sheet by the level they end at."""
    found = transitions(model(text), spectrum(text, count), (start,), **options)
    return found, {line.to: line for line in found.lines}


@pytest.mark.parametrize("start", [0, 1, 4])
def test_strengths_of_an_oscillator(start):
    """F = n + 1 upwards and -n downwards whatever the mass, nothing else; they sum to 1 (closed form)."""
    found, by_end = lines(OSCILLATOR, start)
    for to, line in by_end.items():
        expected = {start + 1: start + 1.0, start - 1: -float(start)}.get(to, 0.0)
        assert abs(line.strength - expected) <= line.strength_error
        assert line.strength_error < 1e-7
    assert found.sums[start] == pytest.approx(1, abs=1e-9)


def test_strengths_where_the_mass_varies():
    """The commutator brings in <1/m>: with m(x) the strengths of many levels still sum to 1 (closure)."""
    text = "H = p*(1/(2*m))*p\nm = 1 + 2*x\nx in (0, 1)"
    found, _ = lines(text, count=60)
    assert found.sums[0] == pytest.approx(1, abs=2e-5)


def test_a_layered_mass():
    """With masses by layers the sum closes in on 1 from below, as 1/levels: x psi has a jump in its flux (closure)."""
    text = "H = p*(1/(2*m))*p\nlayers x: thickness, m\n  1 1\n  1 3\nx in layers"
    sums = [lines(text, count=count)[0].sums[0] for count in (8, 30)]
    assert sums[0] < sums[1] < 1
    assert (1 - sums[1]) * 30 == pytest.approx((1 - sums[0]) * 8, rel=0.3)


def test_matrix_of_x_in_an_oscillator():
    """<n|x|n+1> = sqrt((n + 1)/2) and nothing off the side diagonals, within the errors (closed form)."""
    text = "H = p^2/2 + x^2/2\nx in (-inf, inf)"
    found = matrix_elements(model(text), spectrum(text, 8), "x")
    expected = np.diag(np.sqrt(np.arange(1, 8) / 2), 1)
    assert (np.abs(np.abs(found.values) - (expected + expected.T)) <= found.errors).all()
    assert found.errors.max() < 1e-7


def test_matrix_of_p_between_walls():
    """|<m|p|n>| = 4 m n/|m^2 - n^2| hbar/L for m + n odd, else 0 (closed form)."""
    found = matrix_elements(model(WALLS), spectrum(WALLS, 8), "p")
    for a in range(8):
        for b in range(8):
            m, n = a + 1, b + 1
            size = 0.0 if (m + n) % 2 == 0 else 4 * m * n / abs(m * m - n * n)
            assert abs(abs(found.values[a, b]) - size) <= found.errors[a, b]


def test_an_operator_need_not_be_hermitian_for_its_matrix():
    """The lowering operator joins n to n - 1 with sqrt n (closed form)."""
    text = "H = p^2/2 + x^2/2\nx in (-inf, inf)\na = (x + i*p)/sqrt(2)"
    found = matrix_elements(model(text), spectrum(text, 6), "a")
    for n in range(1, 6):
        assert abs(found.values[n - 1, n]) == pytest.approx(math.sqrt(n), abs=1e-9)
        assert abs(found.values[n, n - 1]) < 1e-9


def test_thermal_populations():
    """Populations go as exp(-E/kT), kT in units of energy where the sheet has none (Boltzmann)."""
    text = "H = p^2/2 + x^2/2\nx in (-inf, inf)"
    shares = populations(model(text), spectrum(text, 30), 0.7)
    assert shares.sum() == pytest.approx(1)
    assert shares[1] / shares[0] == pytest.approx(math.exp(-1 / 0.7), rel=1e-12)


def test_without_units_there_is_no_wavelength():
    """Lines of a dimensionless sheet have neither wavelength nor rate."""
    line = lines(OSCILLATOR)[1][1]
    assert (line.wavelength, line.frequency, line.einstein) == (None, None, None)


def test_units_give_wavelength_frequency_and_rate():
    """1 eV is 8065.543937 cm^-1, 241.7989242 THz and 1239.841984 nm (CODATA); the rate is 2 alpha hbar w^2/(3 m c^2)."""
    text = "units: energy eV, length nm, mass m_e\nH = p^2/(2*m_e) + m_e*w^2*x^2/2\nw = 1/hbar\nx in (-inf, inf)"
    line = lines(text, count=4)[1][1]
    assert line.wavenumber == pytest.approx(8065.543937349211, rel=1e-9)
    assert line.frequency == pytest.approx(241.7989242084918, rel=1e-9)
    assert line.wavelength == pytest.approx(1239.8419843320026, rel=1e-9)
    damping = 2 / 3 * 7.2973525643e-3 / 6.582119569509067e-16 / 510998.95069
    assert line.einstein == pytest.approx(damping, rel=1e-7)


def test_a_dipole_that_commutes_has_no_strength():
    """The unit operator joins nothing, so that no strength is claimed."""
    found, by_end = lines(OSCILLATOR, dipole="1")
    assert by_end[1].strength is None
    assert found.sums[0] is None
    assert found.notes


def test_franck_condon_factors_sum_to_one():
    """The factors from one level into all those of a displaced oscillator sum to 1: exp(-S) S^n/n!, S = 1/2 (closed form)."""
    lower, upper = "H = (p^2 + x^2)/2\nx in (-inf, inf)", "H = (p^2 + (x - 1)^2)/2\nx in (-inf, inf)"
    found = into_other(model(lower), spectrum(lower, 2), spectrum(upper, 20), (0,))
    factors = [abs(line.dipole) ** 2 for line in found.lines]
    assert sum(factors) == pytest.approx(1, abs=1e-12)
    for n, factor in enumerate(factors[:8]):
        assert factor == pytest.approx(math.exp(-0.5) * 0.5**n / math.factorial(n), abs=1e-11)


def test_levels_not_computed_are_named():
    """A line from a level that was not computed is refused; so is a dipole that is not Hermitian."""
    with pytest.raises(SheetError, match="not among"):
        lines(OSCILLATOR, 40)
    with pytest.raises(PhysicsError, match="Hermitian"):
        lines(OSCILLATOR, dipole="x*p")


def test_sum_of_the_strengths_of_a_dipole_with_momenta():
    """Strengths of (x p + p x)/2 in an anharmonic trap sum to 1: its double commutator 2 p^2 + 2 x^2 + ... loses the rest."""
    text = "H = p^2/2 + x^2/2 + 0.08*x^3 + 0.025*x^4\nx in (-inf, inf)\nd = (x*p + p*x)/2"
    found = transitions(model(text), spectrum(text, 24), (0,), "d")
    assert found.sums[0] == pytest.approx(1, abs=1e-8)


def test_no_strengths_where_the_double_commutator_vanishes():
    """With H of first order [x,[H,x]] is 0: lines without strengths, and a note."""
    text = "H = p + cos(x)\nx in ring(0, 2*pi)"
    here = solve(model(text), count=5, near=0.0)
    found = transitions(model(text), here, (0,), "sin(x)")
    assert found.sums[0] is None
    assert all(line.strength is None for line in found.lines)
    assert any("no strengths" in note for note in found.notes)


def test_matrix_of_a_commutator_written_as_such():
    """The matrix of [p, x], whose weak form still has derivatives in it, is -i between equal levels (closed form)."""
    matrix = matrix_elements(model(WALLS), spectrum(WALLS, 4), "commutator(p, x)")
    assert np.allclose(matrix.values, -1j * np.eye(4), atol=1e-9)


def test_a_dipole_that_jumps_on_a_ring_is_told():
    """The coordinate jumps where a ring closes, so that a note says so; a periodic dipole has no such note and sums to 1."""
    ring = model("L = 5.0; H = p^2/2; x in ring(0, L), phase 0.2; s = sin(2*pi*x/L)")
    found_levels = solve(ring, count=9)
    assert any("jumps where the ring closes" in note for note in transitions(ring, found_levels).notes)
    found = transitions(ring, found_levels, dipole="s")
    assert not any("jumps" in note for note in found.notes)
    # the double commutator of sin(k x) is k^2 cos(k x)^2, and two lines carry all of it
    assert found.sums[0] == pytest.approx(1.0, abs=1e-9)
