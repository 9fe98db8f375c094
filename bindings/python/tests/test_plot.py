"""Pictures: what is drawn is what was found."""

import numpy as np
import picket
import pytest
from conftest import film, stack

matplotlib = pytest.importorskip('matplotlib')
matplotlib.use('Agg')
from matplotlib import pyplot  # noqa: E402  (after the choice of what draws)


@pytest.fixture(autouse=True)
def no_figures_left():
    yield
    pyplot.close('all')


def test_bands(mirror):
    result = mirror.bands(count=2, points=4)
    axes = result.plot()
    drawn = np.array([line.get_ydata() for line in axes.get_lines()]).T
    np.testing.assert_array_equal(drawn, result[0].frequencies)
    assert axes.get_lines()[0].get_xdata()[-1] == pytest.approx(1) and axes.get_ylabel() == 'pitch/λ'


def test_labels_of_the_path(mirror):
    mirror['path'] = [{'at': [0, 0], 'label': 'Γ'}, {'at': [1, 0], 'label': 'Z'}]
    axes = mirror.bands(count=1, points=3).plot()
    assert [t.get_text() for t in axes.get_xticklabels()] == ['Γ', 'Z']


def test_edges(mirror):
    mirror['light.polarization'] = 'both'
    result = mirror.edges()
    bars = result.plot().patches
    band = result['ey'].bands[0]
    assert bars[0].get_x() == pytest.approx(1000 * band.short_um.value)
    assert bars[0].get_width() == pytest.approx(1000 * (band.long_um.value - band.short_um.value))
    assert len(bars) == 4       # a stop band and the operating band for each polarization


@pytest.mark.parametrize('study, content, name', [('index', stack(wavelength_nm=[1300, 1400]), 'bloch_index'),
                                                  ('slab', film(wavelength_nm=[1300, 1400]), 'index')])
def test_against_wavelength(study, content, name):
    result = getattr(picket.Problem(content), study)()
    figure, given = pyplot.subplots()
    axes = result.plot(given)
    assert axes is given
    line = axes.get_lines()[0]
    np.testing.assert_allclose(np.array(line.get_xdata(), dtype=float), [1300, 1400])
    np.testing.assert_array_equal(line.get_ydata(), [getattr(p.modes[0], name).value for p in result[0].points])


def test_fields(mirror):
    with mirror.field('ey', 1.4) as field:
        [line] = field.plot().get_lines()
        np.testing.assert_array_equal(line.get_ydata(), (field['Ey'][:, 0] * field.wave).real)


def test_what_has_no_picture(mirror):
    with pytest.raises(ValueError, match='no picture of edge_derivatives'):
        mirror.edge_derivatives('cell.pitch_nm').plot()
