"""Film stacks against transfer-matrix roots."""
import unittest

from drive import check, constant, run, table

REFERENCE = table('slabs')


def problem_of(case, polarization):
    films = [{'fill': f'film{i}', 'thickness_nm': thickness} for i, (_, thickness) in enumerate(case['films'])]
    materials = {f'film{i}': constant(index) for i, (index, _) in enumerate(case['films'])}
    return {'format': 1, 'light': {'wavelength_nm': case['wavelength_nm']},
            'materials': {'substrate': constant(case['substrate']), 'cover': constant(case['cover']), **materials},
            'slab': {'substrate': 'substrate', 'films': films, 'cover': 'cover', 'polarization': polarization}}


class Slabs(unittest.TestCase):
    def test_stated_modes(self):
        tolerance = REFERENCE['tolerance']
        for case in REFERENCE['slabs']:
            for polarization in ('te', 'tm'):
                with self.subTest(case['name'], polarization=polarization):
                    [answer] = run('slab', problem_of(case, polarization))['results']
                    self.assertEqual(answer['polarization'], polarization)
                    [point] = answer['points']
                    if case.get('every_mode'):
                        self.assertEqual(len(point['modes']), len(case[polarization]))
                    for order, (mode, (index, group)) in enumerate(zip(point['modes'], case[polarization])):
                        self.assertEqual(mode['order'], order)
                        check(self, 'index', mode['index'], index, tolerance, digits=case['digits']['index'])
                        if group is not None:
                            check(self, 'group index', mode['group_index'], group, tolerance,
                                  digits=case['digits']['group'])

    def test_films_cut_in_two_change_nothing(self):
        for case in REFERENCE['slabs']:
            index, thickness = case['films'][0]
            halves = {**case, 'films': [[index, 0.3 * thickness], [index, 0.7 * thickness]]}
            for polarization in ('te', 'tm'):
                whole, cut = (run('slab', problem_of(c, polarization))['results'][0]['points'][0]['modes']
                              for c in (case, halves))
                self.assertEqual(len(whole), len(cut))
                for a, b in zip(whole, cut):
                    self.assertAlmostEqual(a['index']['value'], b['index']['value'], delta=4e-12)


if __name__ == '__main__':
    unittest.main()
