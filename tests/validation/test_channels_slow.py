"""Channels in three dimensions against what they must tend to: plain sections, the homogenised section, and our own
prototype's values (finite differences and harmonics extrapolated, confirmed by a coarse direct solve; not published)."""
import math
import unittest

import drive

OXIDE, SILICON = 1.444, 3.4757
TE = {'wavelength_nm': 1550, 'polarization': 'hy'}


def tooth(pitch, length, light=None, **more):
    along = {} if length is None else {'along_nm': [-length / 2, length / 2]}
    return {'format': 1, 'light': light or TE,
            'materials': {'oxide': drive.constant(OXIDE), 'si': drive.constant(SILICON)},
            'channel': {'pitch_nm': pitch, 'cladding': 'oxide',
                        'shapes': [{'rect': {'fill': 'si', 'width_nm': 450, 'height_nm': 220, **along}}]}, **more}


def index(problem, accuracy=1e-3):
    document = drive.run('index', problem, '--accuracy', str(accuracy), '--jobs', '1')
    (answer,) = document['results']
    modes = answer['points'][0]['modes']
    return modes[0] if modes else None


class Channels(unittest.TestCase):
    def test_uniform_channel_is_the_section(self):
        """Boundary integrals: 2.3528329627 (reference of the section solver)."""
        mode = index(tooth(200, None))
        found = mode['bloch_index']
        self.assertAlmostEqual(found['value'], 2.3528329627, delta=found['uncertainty'])
        self.assertEqual(mode['regime'], 'subwavelength')

    def test_prototype(self):
        """Index 1.6733 ± 2e-4 at k = 0.7 π/pitch."""
        problem = tooth(300, 150, {'polarization': 'hy'}, path=[{'at': [0.7, 0]}, {'at': [1, 0]}])
        document = drive.run('bands', problem, '--count', '1', '--points', '1', '--accuracy', '1e-3')
        (answer,) = document['results']
        self.assertEqual(answer['polarization'], 'te-like')
        frequency = answer['points'][0]['frequency'][0]
        found = 0.35 / frequency['value']
        self.assertAlmostEqual(found, 1.6733, delta=2e-4 + found * frequency['uncertainty'] / frequency['value'])

    def test_long_teeth_tend_to_the_wire(self):
        """The gap left is a perturbation of first order in its length."""
        mode = index(tooth(200, 199))
        found = mode['bloch_index']['value']
        self.assertLess(found, 2.3529)
        self.assertGreater(found, 2.33)

    def test_short_teeth_tend_to_the_cladding(self):
        """A tenth of silicon on average binds a te-like mode hardly at all: just above the cladding, or none."""
        mode = index(tooth(200, 40))
        if mode is not None:
            self.assertLess(mode['bloch_index']['value'], 1.46)
            self.assertGreater(mode['bloch_index']['value'] + mode['bloch_index']['uncertainty'], OXIDE)

    def test_short_pitches_tend_to_the_homogenised_section(self):
        """n = n0 + a pitch + b pitch²: at the sides of the row, where silicon alternates with oxide on one side only,
        lies a layer as thick as the pitch, which adds the first-order term (found: a = -2.1e-5/nm, b = 2.5e-7/nm²)."""
        layered = {'layered': {'films': [{'fill': 'si', 'thickness_nm': 0.1}, {'fill': 'oxide', 'thickness_nm': 0.1}]}}
        section = {'format': 1, 'light': TE,
                   'materials': {'oxide': drive.constant(OXIDE), 'si': drive.constant(SILICON), 'teeth': layered},
                   'section': {'cladding': 'oxide',
                               'shapes': [{'rect': {'fill': 'teeth', 'width_nm': 450, 'height_nm': 220}}]}}
        limit = drive.run('modes', section, '--count', '1', '--accuracy', '1e-4')
        limit = limit['results'][0]['points'][0]['modes'][0]['index']
        found = {pitch: index(tooth(pitch, pitch / 2))['bloch_index'] for pitch in (80, 120, 160)}
        # The polynomial through three values, at pitch 0.
        weight = {80: 6, 120: -8, 160: 3}
        start = sum(weight[pitch] * found[pitch]['value'] for pitch in weight)
        slack = sum(abs(weight[pitch]) * found[pitch]['uncertainty'] for pitch in weight)
        self.assertLess(slack, 2e-3)
        self.assertAlmostEqual(start, limit['value'], delta=slack + limit['uncertainty'])
        self.assertLess(abs(found[80]['value'] - limit['value']), 2e-4)
        self.assertGreater(found[160]['value'] - limit['value'], 2e-3)

    def test_facts_of_the_trade(self):
        """Common practice, no source: short teeth guide as a slow medium far below the wire's group index; teeth twice
        as long at the same duty no longer do."""
        wire, short, long = index(tooth(200, None)), index(tooth(300, 150)), index(tooth(600, 300))
        self.assertEqual(short['regime'], 'subwavelength')
        self.assertAlmostEqual(short['group_index']['value'], 2.43, delta=0.02)
        self.assertAlmostEqual(wire['group_index']['value'], 4.147, delta=0.01)
        self.assertTrue(long is None or long['regime'] in ('stop-band', 'radiating'))


if __name__ == '__main__':
    unittest.main()
