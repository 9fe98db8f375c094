"""Gain is an error unless asked for. Asked for, it is absorption with the sign turned: to first order in the
extinction the same row gains what it would lose (perturbation theory; second order is 1e-10 here)."""

import json
import unittest

import tool

ROW = '''format: 1
light: {{wavelength_nm: 1550, polarization: ey}}
materials:
  si: {{constant: {{index: 2.85, extinction: {extinction}{gain}}}}}
  ox: {{constant: {{index: 1.444}}}}
cell: {{pitch_nm: 240, cladding: ox, shapes: [{{rect: {{fill: si, length_nm: 120, width_nm: 450}}}}]}}
'''


class Gain(tool.ToolTest):
    def loss(self, extinction, gain=''):
        path = self.write(ROW.format(extinction=extinction, gain=gain))
        done = self.run_tool('index', '--json', '--jobs=1', '--accuracy=1e-3', path)
        mode = json.loads(done.stdout)['results'][0]['points'][0]['modes'][0]
        return mode['loss_db_per_cm']

    def test_refused_unless_asked_for(self):
        path = self.write(ROW.format(extinction='-1.0e-5', gain=''))
        self.assert_refused('index', path, says=['extinction', '-1.0e-5', 'gain: true'])

    def test_mirrors_absorption(self):
        lost, gained = self.loss('1.0e-5'), self.loss('-1.0e-5', ', gain: true')
        self.assertGreater(lost['value'], 1)
        self.assertAlmostEqual(gained['value'], -lost['value'], delta=lost['uncertainty'])


if __name__ == '__main__':
    unittest.main()
