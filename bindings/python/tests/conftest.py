"""What the tests share. The package of the source tree is tried, on the library of PICKET_LIBRARY, or of build/."""

import os
import pathlib
import sys

import pytest

HERE = pathlib.Path(__file__).resolve().parent
SOURCE = HERE.parents[2]

if os.environ.get('PICKET_BUILD_DIR') and not os.environ.get('PICKET_LIBRARY'):
    os.environ['PICKET_LIBRARY'] = str(pathlib.Path(os.environ['PICKET_BUILD_DIR'], 'libpicket.so.0'))
sys.path.insert(0, str(HERE.parent))

import picket  # noqa: E402  (needs the lines above)

HIGH, LOW = 2.0, 1.45


def stack(first_nm=125.0, second_nm=250 / LOW, polarization='ey', **light):
    """A stack of two constant materials along z; the defaults are quarter-wave layers for 1000 nm."""
    return {'light': {'polarization': polarization, **light},
            'materials': {'high': {'constant': {'index': HIGH}}, 'low': {'constant': {'index': LOW}}},
            'cell': {'pitch_nm': first_nm + second_nm, 'cladding': 'low', 'lateral': 'uniform', 'shapes': [
                {'stripe': {'fill': 'high', 'across': 'z', 'from_nm': -first_nm / 2, 'to_nm': first_nm / 2}}]}}


def film(polarization='te', wavelength_nm=1550, cover=1.0, thickness_nm=400):
    """A film of 2.0 on 1.45."""
    return {'light': {'wavelength_nm': wavelength_nm},
            'materials': {'film': {'constant': {'index': HIGH}}, 'below': {'constant': {'index': LOW}},
                          'above': {'constant': {'index': cover}}},
            'slab': {'substrate': 'below', 'films': [{'fill': 'film', 'thickness_nm': thickness_nm}],
                     'cover': 'above', 'polarization': polarization}}


@pytest.fixture
def mirror():
    """A quarter-wave stack with its first stop band around 1000 nm, as a problem."""
    with picket.Problem(stack(wavelength_nm=[1300, 1400])) as problem:
        yield problem
