"""Numbers of the binding against closed forms evaluated by NumPy and SciPy."""

import math

import numpy as np
import picket
import pytest
from conftest import HIGH, LOW, film, stack
from scipy.optimize import brentq

D1, D2 = 0.125, 0.25 / LOW      # µm, quarter waves of 1 µm
PITCH = D1 + D2

# Stacks are free of truncation: what remains is the rounding of eigenvalues.
EXACT = 1e-9


def half_trace(wavelength, d1=D1, d2=D2, n1=HIGH, n2=LOW):
    """cos KΛ for light along the stack (Yeh, Yariv and Hong 1977); the same for both polarizations."""
    k0 = 2 * np.pi / wavelength
    a, b = k0 * n1 * d1, k0 * n2 * d2
    return np.cos(a) * np.cos(b) - 0.5 * (n1 / n2 + n2 / n1) * np.sin(a) * np.sin(b)


def edge(low, high, **layers):
    """The wavelength of a band edge between two wavelengths, one in the gap and one outside."""
    return brentq(lambda w: half_trace(w, **layers) + 1, low, high, xtol=1e-15)


@pytest.mark.parametrize('polarization', ['ey', 'hy'])
def test_quarter_wave_edges(polarization):
    share = 2 / math.pi * math.asin((HIGH - LOW) / (HIGH + LOW))
    [band] = picket.Problem(stack(polarization=polarization)).edges()[polarization].bands
    assert band.order == 1
    assert band.short_um.value == pytest.approx(1 / (1 + share), rel=EXACT)
    assert band.long_um.value == pytest.approx(1 / (1 - share), rel=EXACT)
    # The field falls by n_low/n_high per pitch in the middle of the gap, where it falls most.
    assert band.attenuation_db_per_pitch.value == pytest.approx(20 * math.log10(HIGH / LOW), rel=1e-8)
    for quantity, exact in ((band.short_um, 1 / (1 + share)), (band.long_um, 1 / (1 - share))):
        assert abs(quantity.value - exact) <= quantity.uncertainty


def test_edges_of_unequal_layers():
    layers = {'d1': 0.2, 'd2': 0.15}
    [band] = picket.Problem(stack(200, 150)).edges()['ey'].bands
    middle = 0.5 * (band.short_um.value + band.long_um.value)
    assert abs(half_trace(middle, **layers)) > 1
    assert band.long_um.value == pytest.approx(edge(middle, 1.2 * middle, **layers), rel=EXACT)
    assert band.short_um.value == pytest.approx(edge(0.8 * middle, middle, **layers), rel=EXACT)


def test_bands_meet_the_dispersion_relation():
    [answer] = picket.Problem(stack()).bands(count=3, points=6)
    assert answer.frequencies.shape == (7, 3) and answer.band_count == 3
    assert answer.wavenumbers.shape == (7, 2)
    kz = answer.wavenumbers[:, 0]
    np.testing.assert_allclose(kz, np.linspace(0, 1, 7), atol=1e-15)
    with np.errstate(divide='ignore', invalid='ignore'):
        found = half_trace(PITCH / answer.frequencies)
    inside = answer.frequencies > 1e-6       # at k = 0 the first band begins at frequency 0
    expected = np.broadcast_to(np.cos(np.pi * kz)[:, None], found.shape)
    np.testing.assert_allclose(found[inside], expected[inside], atol=1e-8)
    assert inside.sum() == 20
    [gap] = [g for g in answer.gaps if g.below == 1]
    assert gap.start.value == pytest.approx(PITCH / edge(1.0, 1.3), rel=EXACT)
    assert gap.to.value == pytest.approx(PITCH / edge(0.8, 1.0), rel=EXACT)


def test_bloch_index_of_a_stack():
    result = picket.Problem(stack(wavelength_nm={'from': 1250, 'to': 1600, 'points': 4})).index(accuracy=1e-5)
    columns = result.columns()
    wavelength = columns['wavelength_um']
    exact = np.arccos(half_trace(wavelength)) * wavelength / (2 * np.pi * PITCH)
    off = np.abs(columns['bloch_index'] - exact)
    assert off.max() < 1e-8
    assert np.all(off <= columns['bloch_index_uncertainty'])
    step = 1e-4     # second-order difference of a function that varies over ~0.3 µm: relative error ~1e-7
    slope = [(np.arccos(half_trace(w + step)) * (w + step) - np.arccos(half_trace(w - step)) * (w - step))
             / (4 * np.pi * PITCH * step) for w in wavelength]
    np.testing.assert_allclose(columns['group_index'], exact - wavelength * slope, rtol=1e-5)


def test_inside_the_stop_band():
    [answer] = picket.Problem(stack(wavelength_nm=1000)).index()
    [mode] = answer.points[0].modes
    assert mode.regime is picket.Regime.STOP_BAND and mode.regime.word == 'stop-band'
    assert mode.bloch_index.value == pytest.approx(0.5 / PITCH, rel=1e-9)
    assert math.isnan(mode.group_index.value) and mode.group_index.note
    assert mode.loss_db_per_pitch.value == pytest.approx(20 * math.log10(HIGH / LOW), rel=1e-6)


def slab_index(order, polarization, wavelength, thickness, cover):
    """The root of κd = mπ + Φ_below + Φ_above (the resonance of a film), by Brent's method."""
    k0 = 2 * math.pi / wavelength

    def resonance(n):
        kappa = k0 * math.sqrt(HIGH**2 - n**2)
        total = kappa * thickness - order * math.pi
        for outer in (LOW, cover):
            weight = 1 if polarization == 'te' else (HIGH / outer)**2
            total -= math.atan(weight * k0 * math.sqrt(n**2 - outer**2) / kappa)
        return total

    low, high = max(LOW, cover) * (1 + 1e-12), HIGH * (1 - 1e-12)
    return brentq(resonance, low, high, xtol=1e-15, rtol=1e-14)


@pytest.mark.parametrize('polarization', ['te', 'tm'])
@pytest.mark.parametrize('cover', [1.0, LOW])
def test_slab_modes(polarization, cover):
    [answer] = picket.Problem(film(polarization, [800, 1550], cover, 600)).slab()
    assert answer.polarization.word == polarization
    for point in answer.points:
        assert len(point.modes) >= 1
        for mode in point.modes:
            exact = slab_index(mode.order, polarization, point.wavelength_um, 0.6, cover)
            assert mode.index.value == pytest.approx(exact, abs=1e-12)
            h = 1e-4 * point.wavelength_um
            slope = (slab_index(mode.order, polarization, point.wavelength_um + h, 0.6, cover)
                     - slab_index(mode.order, polarization, point.wavelength_um - h, 0.6, cover)) / (2 * h)
            assert mode.group_index.value == pytest.approx(exact - point.wavelength_um * slope, rel=1e-6)
        with pytest.raises(ValueError):
            slab_index(len(point.modes), polarization, point.wavelength_um, 0.6, cover)     # there is no other


def test_edge_derivative_against_a_difference_quotient():
    [answer] = picket.Problem(stack()).edge_derivatives('materials.high.constant.index')
    h = 1e-5        # error of the quotient ~h², of its rounding ~1e-15/h
    for found, (low, high) in ((answer.bands[0].long_um, (1.0, 1.3)), (answer.bands[0].short_um, (0.8, 1.0))):
        slope = (edge(low, high, n1=HIGH + h) - edge(low, high, n1=HIGH - h)) / (2 * h)
        assert found.value == pytest.approx(slope, rel=1e-6)


def test_index_derivative_against_a_difference_quotient():
    [answer] = picket.Problem(stack(wavelength_nm=1400)).index_derivatives('materials.low.constant.index')
    def index(n2):
        return math.acos(half_trace(1.4, n2=n2)) * 1.4 / (2 * math.pi * PITCH)
    slope = (index(LOW + 1e-5) - index(LOW - 1e-5)) / 2e-5
    assert answer.points[0].bloch_index.value == pytest.approx(slope, rel=1e-6)


def test_aim():
    problem = picket.Problem({**stack(), 'aim': {'vary': 'materials.high.constant.index', 'between': [1.8, 2.2],
                                                 'quantity': 'long_nm', 'target': 1150}})
    [answer] = problem.aim(accuracy=1e-6)
    [part] = answer.parts
    exact = brentq(lambda n: half_trace(1.15, n1=n) + 1, 1.9, 2.2, xtol=1e-14)
    assert answer.found and answer.reason is None and answer.polarization == 'ey'
    assert (part.vary, part.start, part.to, part.target) == ('materials.high.constant.index', 1.8, 2.2, 1150)
    assert abs(part.value.value - exact) <= part.value.uncertainty < 1e-4
    assert part.achieved.value == pytest.approx(1150, rel=1e-6)
    problem['aim.target'] = 2000
    result = problem.aim()
    assert not result.complete and not result['ey'].found and result['ey'].reason
    assert math.isnan(result['ey'].parts[0].value.value) and result.columns()['found'][0] == False  # noqa: E712


def test_tolerance(tmp_path):
    # The index spreads normally and the edge follows it nearly on a line; it is limited where the index is one standard
    # deviation up.
    problem = picket.Problem({**stack(), 'tolerance': {
        'spreads': [{'vary': 'materials.high.constant.index', 'sigma': 0.02}],
        'require': {'quantity': 'long_nm', 'at_most': 1000 * edge(1.0, 1.4, n1=HIGH + 0.02)}}})
    [answer] = problem.tolerance(accuracy=1e-6, journal=tmp_path / 'journal')
    share = 0.5 * math.erfc(-1 / math.sqrt(2))
    assert abs(answer.yielded.value.value - share) <= answer.yielded.value.uncertainty < 0.01
    assert answer.yielded.low <= share <= answer.yielded.high and answer.yielded.samples == 10000
    [one] = answer.sensitivities
    slope = 1000 * (edge(1.0, 1.4, n1=HIGH + 1e-4) - edge(1.0, 1.4, n1=HIGH - 1e-4)) / 2e-4
    assert one.per_unit.value == pytest.approx(slope, rel=1e-4) and one.sigma == 0.02 and math.isnan(one.start)
    assert [c.places[0].value for c in answer.corners] == pytest.approx([HIGH - 0.06, HIGH + 0.06], rel=1e-14)
    assert answer.worst == 1 and answer.worst_value.value == answer.corners[1].value.value
    assert len(answer.checks) == 12 and answer.deviates[0].normal


def test_taper():
    problem = picket.Problem({**stack(), 'taper': {
        'teeth': 3, 'at_nm': 1550, 'changes': [{'vary': 'materials.high.constant.index', 'from': 2, 'to': 2.2}]}})
    [row] = problem.taper(accuracy=1e-6)
    assert row.polarization == picket.Polarization.EY and math.isnan(row.fibre_um)
    assert (row.changes[0].start, row.changes[0].to, row.changes[0].law.word) == (2, 2.2, 'linear')
    assert [tooth.values for tooth in row.teeth] == [(2.0,), (2.1,), (2.2,)]
    for tooth in row.teeth:
        exact = math.acos(half_trace(1.55, n1=tooth.values[0])) * 1.55 / (2 * math.pi * PITCH)
        assert abs(tooth.bloch_index.value - exact) <= tooth.bloch_index.uncertainty
        assert tooth.warned == () and not tooth.failed
    assert row.transmission.value == pytest.approx(1, abs=1e-14) and 0 < row.teeth[0].reflection_next.value < 0.01
    table = problem.taper().columns()
    assert list(table['number']) == [1, 2, 3] and len(table['bloch_index_uncertainty']) == 3


def strip(width_nm=600, **cladding):
    return {'light': {'wavelength_nm': 1550},
            'materials': {'core': {'constant': {'index': HIGH}}, 'around': {'constant': {'index': LOW}}},
            'section': {'cladding': 'around', 'shapes': [{'rect': {'fill': 'core', 'width_nm': width_nm,
                                                                   'height_nm': 500}}]}}


def test_match():
    context = picket.Context()
    wide, narrow = (picket.Problem(strip(w), context=context) for w in (700, 600))
    share = [a.match(b, mode_b=0, offset_um=(0, 0), accuracy=1e-2)[0].points[0].coupling.share
             for a, b in ((wide, narrow), (narrow, wide), (wide, wide))]
    assert abs(share[0].value - share[1].value) <= share[0].uncertainty + share[1].uncertainty    # reciprocity
    assert 0.9 < share[0].value < 1
    assert abs(share[2].value - 1) <= share[2].uncertainty + 1e-12                                # with itself
    [answer] = wide.match(gaussian_um=(1.0, 0.8), along='x', offset_um=(0.5, 0), accuracy=1e-2)
    [point] = answer.points
    assert answer.other is None and answer.request.gaussian_y_um == 0.8 and answer.request.offset_given
    assert point.along.word == 'x' and point.mode_b == -1
    [centred] = wide.match(gaussian_um=(1.0, 0.8), along='x', offset_um=(0, 0), accuracy=1e-2)[0].points
    assert 0 < point.coupling.share.value < centred.coupling.share.value < 1
    assert centred.coupling.share_db.value == pytest.approx(10 * math.log10(centred.coupling.share.value))
    with pytest.raises(picket.ArgumentError, match='of another context'):
        wide.match(picket.Problem(strip()))
    with pytest.raises(picket.ArgumentError):
        wide.match()


def test_modes_of_a_section():
    # A film from wall to wall: between electric walls across x, E along x is uniform, so the section's first mode is
    # the film's te mode. Above and below the walls are 2 µm away, where that mode is down to exp(-16).
    problem = picket.Problem({
        'light': {'wavelength_nm': 1550},
        'materials': {'film': {'constant': {'index': HIGH}}, 'around': {'constant': {'index': LOW}}},
        'section': {'cladding': 'around', 'span_nm': [300, 5000],
                    'shapes': [{'stripe': {'fill': 'film', 'across': 'y', 'from_nm': -200, 'to_nm': 200}}]}})
    [answer] = problem.modes(count=1)
    [mode] = answer.points[0].modes
    exact = slab_index(0, 'te', 1.55, 0.4, LOW)
    assert abs(mode.index.value - exact) <= mode.index.uncertainty < 1e-4 * exact
    assert mode.ex_share == pytest.approx(1) and (mode.nodes_x, mode.nodes_y) == (0, 0)
    shares = {part.material: part.share for part in mode.confinement}
    assert set(shares) == {'film', 'around'} and sum(shares.values()) == pytest.approx(1)
    assert mode.effective_area_um2.value > 0 and mode.diameters.e2_y_um.value > 0.4


def test_field_of_a_section():
    # The film from wall to wall again: E_x is the film's te mode, cos κy inside and exp(-γ|y|) outside.
    problem = picket.Problem({
        'light': {'wavelength_nm': 1550},
        'materials': {'film': {'constant': {'index': HIGH}}, 'around': {'constant': {'index': LOW}}},
        'section': {'cladding': 'around', 'span_nm': [300, 5000],
                    'shapes': [{'stripe': {'fill': 'film', 'across': 'y', 'from_nm': -200, 'to_nm': 200}}]}})
    with problem.section_field(1.55, accuracy=1e-5) as field:
        about = field.description
        exact = slab_index(0, 'te', 1.55, 0.4, LOW)
        assert about.order == 0 and about.index_re == pytest.approx(exact, rel=1e-3)
        values, (x, y) = field['Ex'], field.places('Ex')
        assert values.shape == field.shape('Ex') == (len(x), len(y)) and np.all(np.diff(y) > 0)
        assert field.permittivity('Ex').shape == values.shape
        assert field.permittivity('Ex').real.max() == pytest.approx(HIGH**2)
        k0 = 2 * math.pi / 1.55
        kappa, gamma = k0 * math.sqrt(HIGH**2 - exact**2), k0 * math.sqrt(exact**2 - LOW**2)
        shape = np.where(np.abs(y) < 0.2, np.cos(kappa * y), math.cos(0.2 * kappa) * np.exp(-gamma * (abs(y) - 0.2)))
        scaled = values.real / np.abs(values).max() * np.abs(shape).max()
        np.testing.assert_allclose(scaled, np.broadcast_to(shape, scaled.shape), atol=1e-2)   # of the grid
        with pytest.raises(KeyError):
            field['Fx']
        with pytest.raises(picket.ArgumentError):
            field.permittivity('Hx')
    with pytest.raises(picket.ClosedError):
        field['Ex']


@pytest.mark.parametrize('polarization', ['ey', 'hy'])
def test_field_of_a_stack(polarization):
    problem = picket.Problem(stack(polarization=polarization))
    with problem.field(polarization, 1.4) as field:
        about = field.description
        assert (about.polarization.word, about.order, about.propagates) == (polarization, 0, True)
        assert about.wavelength_um == pytest.approx(1.4) and about.pitch_um == pytest.approx(PITCH)
        exact = math.acos(half_trace(1.4)) * 1.4 / (2 * math.pi * PITCH)
        assert about.index_re == pytest.approx(exact, rel=1e-3)
        nz, nx = field.shape
        assert nx == 1 and field.z_um.shape == (nz,) and field.x_um.shape == (1,)
        assert field.z_um[0] == pytest.approx(-PITCH / 2) and field.z_um[-1] == pytest.approx(PITCH / 2)
        parts = {name: field[name] for name in ('Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz')}
        assert all(part.shape == (nz, nx) and part.dtype == complex for part in parts.values())
        # 1 W/m² towards +z: the same at every z, as nothing absorbs. The interpolated component is as good as
        # the grid.
        flow = 0.5 * (parts['Ex'] * parts['Hy'].conj() - parts['Ey'] * parts['Hx'].conj()).real
        np.testing.assert_allclose(flow, 1, rtol=2e-2)
        main = parts['Ey' if polarization == 'ey' else 'Hy']
        largest = main.flat[np.argmax(np.abs(main))]
        assert largest.real > 0 and abs(largest.imag) < 1e-12 * largest.real
        np.testing.assert_allclose(main[0], main[-1], rtol=1e-12)
        assert field.permittivity.real.max() == pytest.approx(HIGH**2)
        assert field.permittivity.real.min() == pytest.approx(LOW**2)
        assert field.unit('Ey') == 'V/m' and field.unit('Hz') == 'A/m'
        assert abs(field.wave[0]) == pytest.approx(1)
