"""How much a channel leaks into a silicon substrate, against the thickness of the oxide between."""
import math
import unittest

import drive

OXIDE, SILICON = 1.444, 3.4757


def leaking(oxide_nm):
    """Teeth of 450 x 220 nm, 150 of 300 nm, their lower face at y = 0."""
    document = drive.run('index', {
        'format': 1, 'light': {'wavelength_nm': 1550, 'polarization': 'hy'},
        'materials': {'oxide': drive.constant(OXIDE), 'si': drive.constant(SILICON)},
        'channel': {'pitch_nm': 300, 'cladding': 'oxide',
                    'shapes': [{'stripe': {'fill': 'si', 'across': 'y', 'from_nm': -math.inf, 'to_nm': -oxide_nm}},
                               {'rect': {'fill': 'si', 'width_nm': 450, 'height_nm': 220, 'at_nm': [0, 110],
                                         'along_nm': [-75, 75]}}]}}, '--accuracy', '1e-2', '--jobs', '1')
    return document['results'][0]['points'][0]['modes'][0]


class Leaks(unittest.TestCase):
    def test_loss_falls_at_the_rate_of_the_index(self):
        """Outside a narrow guide the field is that of a line, K0(κ r) ~ exp(-κ r)/√r, so the loss falls as
        exp(-2 κ d)/d with √d of it made up for by the wider patch that is lit: exp(-2 κ d)/√d, within 3 %."""
        thin, thick = leaking(800), leaking(1100)
        index = thick['bloch_index']['value']
        rate = 2 * 2 * math.pi / 1.55 * math.sqrt(index**2 - OXIDE**2)
        found = math.log(thin['loss_db_per_cm']['value'] / thick['loss_db_per_cm']['value'])
        self.assertAlmostEqual((found - 0.5 * math.log(1100 / 800)) / (rate * 0.3), 1, delta=0.03)
        self.assertEqual(thick['regime'], 'subwavelength')
        self.assertEqual(thick['absorption_db_per_cm']['value'], 0)


if __name__ == '__main__':
    unittest.main()
