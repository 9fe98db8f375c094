"""Modes of sections against characteristic equations and published values: inside their bars."""
import unittest

import drive


def problem(case):
    return {'format': 1, 'light': {'wavelength_nm': case['wavelength_nm']},
            'materials': {name: drive.constant(index) for name, index in case['materials'].items()},
            'section': {'cladding': 'clad', 'shapes': case['shapes']}}


class Sections(unittest.TestCase):
    def check(self, case, accuracy):
        count = len(case['index'])
        document = drive.run('modes', problem(case), '--count', str(count), '--accuracy', str(accuracy))
        (point,), = [answer['points'] for answer in document['results']]
        self.assertEqual(len(point['modes']), count)
        for i, mode in enumerate(point['modes']):
            with self.subTest(case['name'], mode=i):
                slack = case['digits'] + mode['index']['uncertainty']
                self.assertAlmostEqual(mode['index']['value'], case['index'][i], delta=slack)
                group = case.get('group', [None] * count)[i]
                if group is not None:
                    slack = case['digits'] + mode['group_index']['uncertainty']
                    self.assertAlmostEqual(mode['group_index']['value'], group, delta=slack)
                if document['complete']:
                    self.assertLessEqual(mode['index']['uncertainty'], accuracy * mode['index']['value'])
        return point['modes']

    def test_indices(self):
        for case in drive.table('sections'):
            modes = self.check(case, 5e-4)
            if 'loss_db_per_cm' in case:
                loss = modes[0]['loss_db_per_cm']['value']
                self.assertAlmostEqual(loss / case['loss_db_per_cm'], 1, delta=case['loss_tolerance'])
                self.assertAlmostEqual(modes[0]['index']['value'], case['index'][0],
                                       delta=case['digits'] + modes[0]['index']['uncertainty'])


if __name__ == '__main__':
    unittest.main()
