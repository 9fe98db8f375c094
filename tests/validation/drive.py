"""What the checks of this folder share: problems as Python values, one call of the tool, and reference tables.

A problem file is YAML, and JSON is YAML: problems go to `picket COMMAND --json -` on standard input. The tables
beside this file hold what others say: problem, quantity, expected value, tolerance, source. Origin marks:
S published source, digits as stated in it; F closed form or semi-analytic root computed independently; m value
known from memory of the source; t fact of the trade, common practice.
"""
import json
import math
import os
import pathlib
import subprocess

import yaml

HERE = pathlib.Path(__file__).resolve().parent
TOOL = os.environ.get('PICKET_TOOL') or str(HERE.parents[1] / 'build' / 'picket')


def run(command, problem, *options):
    """The document the tool answers with. Status 1 (the accuracy was not met) is an answer too: it says so itself."""
    text = json.dumps(problem).replace('-Infinity', '-.inf').replace('Infinity', '.inf')  # of YAML
    done = subprocess.run([TOOL, command, '--json', *options, '-'], input=text, capture_output=True, text=True,
                          check=False)
    if done.returncode not in (0, 1):
        raise AssertionError(f'picket {command} ended with {done.returncode}: {done.stderr}\n{json.dumps(problem)}')
    return json.loads(done.stdout)


def table(name):
    """The reference table `name`.yaml of this folder."""
    return yaml.safe_load((HERE / f'{name}.yaml').read_text())


# --- Problems --------------------------------------------------------------------------------------

def constant(index):
    return {'constant': {'index': index}}


def stack(layers, polarization='ey', **cell):
    """A stack of (index, thickness in nm) along z; the first layer begins at the left end of the cell."""
    pitch = math.fsum(thickness for _, thickness in layers)
    shapes, at = [], -pitch / 2
    for i, (_, thickness) in enumerate(layers):
        if i > 0:
            shapes.append({'stripe': {'fill': f'layer{i}', 'across': 'z', 'from_nm': at, 'to_nm': at + thickness}})
        at += thickness
    return {'format': 1, 'light': {'polarization': polarization},
            'materials': {f'layer{i}': constant(index) for i, (index, _) in enumerate(layers)},
            'cell': {'pitch_nm': pitch, 'cladding': 'layer0', 'lateral': 'uniform', 'shapes': shapes, **cell}}


def row(pitch, length, width, polarization, tooth=3.476, around=1.444, bridge=None, **light):
    """A row of rectangular teeth in an open cell; a bridge of another index may join them."""
    shapes, materials = [], {'tooth': constant(tooth), 'around': constant(around)}
    if bridge is not None:
        materials['bridge'] = constant(bridge)
        shapes.append({'stripe': {'fill': 'bridge', 'across': 'x', 'from_nm': -width / 2, 'to_nm': width / 2}})
    shapes.append({'rect': {'fill': 'tooth', 'length_nm': length, 'width_nm': width}})
    return {'format': 1, 'light': {'polarization': polarization, **light}, 'materials': materials,
            'cell': {'pitch_nm': pitch, 'cladding': 'around', 'lateral': 'open', 'shapes': shapes}}


def lattice(shapes, eps_shape, eps_around, polarization, pitch=1000, span=None, **cell):
    """A two-dimensional lattice: shapes of one permittivity in another."""
    return {'format': 1, 'light': {'polarization': polarization},
            'materials': {'shape': constant(math.sqrt(eps_shape)), 'around': constant(math.sqrt(eps_around))},
            'cell': {'pitch_nm': pitch, 'cladding': 'around', 'lateral': 'periodic',
                     'lateral_span_nm': pitch if span is None else span, 'shapes': shapes, **cell}}


def disc(diameter, at=(0, 0), fill='shape'):
    return {'disc': {'fill': fill, 'diameter_nm': diameter, 'at_nm': list(at)}}


def rect(length, width, at=(0, 0), fill='shape'):
    return {'rect': {'fill': fill, 'length_nm': length, 'width_nm': width, 'at_nm': list(at)}}


# --- Answers ---------------------------------------------------------------------------------------

def first_band(problem, *options):
    """The first stop band of a problem with one polarization."""
    return run('edges', problem, *options)['results'][0]['stop_bands'][0]


def bands_at(problem, wavenumbers, count, *options):
    """Frequencies, pitch/λ, at each wavenumber [kz, kx] in units of π/pitch and π/span: lists of quantities."""
    wavenumbers = [list(k) for k in wavenumbers]
    path = wavenumbers + ([[wavenumbers[0][0] + 1, wavenumbers[0][1]]] if len(wavenumbers) == 1 else [])
    asked = {**problem, 'path': [{'at': k} for k in path]}
    answer = run('bands', asked, '--points', '1', '--count', str(count), *options)
    return [point['frequency'] for point in answer['results'][0]['points']][:len(wavenumbers)]


def check(case, name, quantity, expected, tolerance, digits=0.0, bar='honest'):
    """Holds a quantity against an outside value.

    tolerance  largest relative difference
    digits     absolute rounding of the expected value as printed
    bar        'honest': the uncertainty must cover the difference; 'absent': there must be none, and a note why"""
    value, uncertainty = quantity['value'], quantity['uncertainty']
    case.assertIsNotNone(value, f'{name}: no value, {quantity.get("note")}')
    off = abs(value - expected)
    case.assertLessEqual(off, tolerance * abs(expected) + digits,
                         f'{name}: {value!r} is off {expected!r} by {off / abs(expected):.2e} of it')
    if bar == 'absent':
        case.assertIsNone(uncertainty, f'{name}: there is a bar now; hold it against the truth')
        case.assertTrue(quantity['note'])
    else:
        case.assertIsNotNone(uncertainty, f'{name}: no bar, {quantity.get("note")}')
        case.assertLessEqual(off, uncertainty + digits,
                             f'{name}: the bar {uncertainty:.2e} does not cover the error {off:.2e}')
