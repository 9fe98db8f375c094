"""--figure: the picture says what the table says, texts of the file stay texts, and what goes wrong
leaves the numbers and no half of a file."""

import csv
import os
import re
import subprocess
import unittest
import xml.etree.ElementTree as ElementTree

import tool

ROUGH = '--accuracy=1e-2'
GNUPLOT = '/usr/bin/gnuplot'

WIRE = tool.MATERIALS.format(name='wire') + '''light: {wavelength_nm: [1500, 1550]}
section:
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}
'''

HOSTILE = '\'"\\`touch owned`\'.system("touch owned").\' @x {/Bold a}_b^c $1 %s %n <b>&amp;</b> ]]> \u0416\u65e5 \n! touch owned\nEND\n#'

SVG = '{http://www.w3.org/2000/svg}'


def blocks(script):
    """{name: rows of numbers} of the data in a script."""
    found = {}
    for name, body in re.findall(r'^\$(\w+) << END\n(.*?)^END$', script, re.M | re.S):
        found[name] = [[float(word) for word in line.split()] for line in body.splitlines()
                       if line.strip() and not line.startswith('#')]
    return found


def texts(path):
    """What is written in an SVG picture."""
    return [''.join(element.itertext()) for element in ElementTree.parse(path).getroot().iter(f'{SVG}text')]


class Figure(tool.ToolTest):
    def draw(self, command, text, *words, name='out.svg', status=0, **more):
        """Runs it with a table; (rows of the table, blocks of the script)."""
        self.run_tool(command, self.write(text), '--figure', name, '--keep-script', '--csv', 'out.csv', ROUGH, *words,
                      status=status, **more)
        rows = list(csv.DictReader((self.folder / 'out.csv').read_text(encoding='utf-8').splitlines()))
        return rows, blocks((self.folder / f'{name}.gp').read_text(encoding='utf-8'))

    def files(self):
        return sorted(path.name for path in self.folder.iterdir())

    def assert_equal_numbers(self, drawn, row, names):
        """Digit by digit; an empty field is NaN."""
        for value, name in zip(drawn, names, strict=True):
            if row[name] == '':
                self.assertNotEqual(value, value, name)
            else:
                self.assertEqual(value, float(row[name]), name)

    def test_edges_are_those_of_the_table(self):
        rows, data = self.draw('edges', tool.stack().replace('polarization: ey', 'polarization: both'), '--count', '2')
        drawn = [row for i in range(2) for row in data[f'edges_{i}']]
        self.assertEqual(len(drawn), len(rows))
        for line, row in zip(drawn, rows):
            self.assert_equal_numbers(line[1:], row, ['order', 'short_nm', 'short_uncertainty_nm', 'long_nm',
                                                      'long_uncertainty_nm'])
        first = rows[0]
        self.assert_equal_numbers(data['clearance_0'][0][1:], first,
                                  ['long_nm', 'operating_from_nm', 'clearance_nm', 'clearance_uncertainty_nm'])
        self.assert_equal_numbers(data['estimate_0'][0][1:], first, ['estimate_centre_nm'])
        written = texts(self.folder / 'out.svg')
        for word in ('stack', 'vacuum wavelength (nm)', 'ey', 'hy', 'order 1', 'operating band'):
            self.assertIn(word, written)

    def test_bands_are_those_of_the_table(self):
        rows, data = self.draw('bands', tool.stack(), '--points', '3', '--count', '2')
        self.assertEqual(len(data['bands_0']), len(rows))
        for line, row in zip(data['bands_0'], rows):
            self.assert_equal_numbers(line[1:], row, ['kz_pi_per_pitch', 'kx_pi_per_lateral_span',
                                                      'band_1_pitch_per_wavelength', 'band_1_uncertainty',
                                                      'band_2_pitch_per_wavelength', 'band_2_uncertainty'])
        # The gap is the stop band, whose edges are known.
        gap = data['gaps_0'][0]
        self.assertAlmostEqual(gap[1], tool.STACK_EDGES[0], delta=gap[2] + 1e-8)
        self.assertAlmostEqual(gap[3], tool.STACK_EDGES[1], delta=gap[4] + 1e-8)
        self.assertIn('frequency (pitch/λ)', texts(self.folder / 'out.svg'))

    def test_light_line(self):
        """A side without dispersion: f = k_z / 2n."""
        row = tool.MATERIALS.format(name='row') + '''light: {wavelength_nm: 1550, polarization: hy}
cell:
  pitch_nm: 300
  cladding: oxide
  shapes:
    - rect: {fill: core, length_nm: 150, width_nm: 300}
'''
        _, data = self.draw('bands', row, '--points', '2', '--count', '1')
        for place, frequency in data['light_line_0']:
            self.assertAlmostEqual(frequency, place / 2 / 1.444, delta=1e-12)

    def test_indices_are_those_of_the_table(self):
        text = tool.stack().replace('[1500, 1580]', '{from: 800, to: 1500, points: 8}')
        rows, data = self.draw('index', text)
        self.assertEqual(len(data['index_0_0']), len(rows))
        for line, row in zip(data['index_0_0'], rows):
            self.assert_equal_numbers(line, row, ['wavelength_nm', 'bloch_index', 'bloch_index_uncertainty',
                                                  'group_index', 'group_index_uncertainty'])
        for line, row in zip(data['estimate_0'], rows):
            self.assert_equal_numbers(line, row, ['wavelength_nm', 'estimate'])
        written = texts(self.folder / 'out.svg')
        for word in ('Bloch index (1)', 'group index (1)', 'stop band', 'estimate'):
            self.assertIn(word, written)

    def test_a_panel_without_values_says_so(self):
        """Inside a stop band there is no group index."""
        self.draw('index', tool.stack().replace('[1500, 1580]', '1000'))
        self.assertIn('no values', texts(self.folder / 'out.svg'))

    def test_film_modes_are_those_of_the_table(self):
        rows, data = self.draw('slab', tool.film())
        names = ['wavelength_nm', 'index', 'index_uncertainty', 'group_index', 'group_index_uncertainty']
        for i, polarization in enumerate(('te', 'tm')):
            of_this = [row for row in rows if row['polarization'] == polarization and row['order'] == '0']
            self.assertEqual(len(data[f'slab_{i}_0']), len(of_this))
            for line, row in zip(data[f'slab_{i}_0'], of_this):
                self.assert_equal_numbers(line, row, names)

    def test_section_modes_are_those_of_the_table(self):
        rows, data = self.draw('modes', WIRE, '--count', '2')
        for order in (0, 1):
            of_this = [row for row in rows if row['order'] == str(order)]
            self.assertEqual(len(data[f'modes_0_{order}']), len(of_this))
            for line, row in zip(data[f'modes_0_{order}'], of_this):
                self.assert_equal_numbers(line, row, ['wavelength_nm', 'index', 'index_uncertainty', 'group_index',
                                                      'group_index_uncertainty'])
        rows, data = self.draw('modes', WIRE, '--count', '2', '--set', 'light.wavelength_nm=1550')
        for line, row in zip(data['levels'], rows, strict=True):
            self.assert_equal_numbers(line, row, ['order', 'index', 'index_uncertainty'])
        corners = [row[:2] for row in data['section_shapes'] if row[2] > 3]
        self.assertEqual(corners, [[225, 0], [225, 220], [-225, 220], [-225, 0], [225, 0]])

    def test_sensitivities_are_those_of_the_table(self):
        text = tool.stack() + '''tolerance:
  spreads:
    - {vary: cell.shapes.0.to_nm, from: 48, to: 53}
    - {vary: cell.pitch_nm, sigma_nm: 1}
  require: {quantity: clearance_nm, at_least: 200}
'''
        rows, data = self.draw('tolerance', text)
        value = {row['vary'] or row['row']: float(row['value']) for row in rows}
        # The longest on top: three standard deviations of the pitch, then the range about 50 nm.
        for drawn, name, ends in zip(data['reach_0'], ('cell.pitch_nm', 'cell.shapes.0.to_nm'), ((-3, 3), (-2, 3))):
            for number, end in zip(drawn[1:3], ends):
                self.assertAlmostEqual(number, value['nominal'] + end * value[name], delta=1e-9)
        self.assertEqual(data['worst_0'][0][1], value['worst corner'])
        written = texts(self.folder / 'out.svg')
        for word in ('clearance_nm (nm)', 'cell.pitch_nm', 'requirement', 'worst corner'):
            self.assertIn(word, written)

    def test_teeth_are_those_of_the_table(self):
        text = tool.stack().replace('polarization: ey', 'polarization: both') + '''taper:
  teeth: 4
  at_nm: 1550
  changes:
    - {vary: cell.shapes.0.to_nm, from: 0, to: 60, law: cosine}
'''
        rows, data = self.draw('taper', text)
        drawn = data['taper_0'] + data['taper_1']
        for line, row in zip(drawn, rows, strict=True):
            self.assert_equal_numbers(line[:-1], row, ['tooth', 'bloch_index', 'bloch_index_uncertainty',
                                                       'mode_size_um', 'mode_size_uncertainty_um', 'overlap_next',
                                                       'overlap_next_uncertainty'])
        self.assertIn('mode size, 4σ (µm)', texts(self.folder / 'out.svg'))

    def test_map_of_a_cell(self):
        """A disc is round, and wraps where it crosses the end of the period."""
        text = tool.MATERIALS.format(name='x') + '''cell:
  pitch_nm: 500
  cladding: oxide
  lateral: periodic
  lateral_span_nm: 400
  shapes:
    - disc: {fill: core, diameter_nm: 200, at_nm: [250, 0]}
'''
        _, data = self.draw('check', text)
        disc = [row for row in data['cell_shapes'] if row[2] > 3]
        for z, x, _ in disc:
            self.assertAlmostEqual(min(abs(z - 250), abs(z + 250)) ** 2 + x ** 2, 1e4, delta=1e-6)
        self.assertEqual({row[0] > 0 for row in disc}, {True, False})
        self.assertIn('core 3.4760', texts(self.folder / 'out.svg'))

    def test_each_format(self):
        for name, begins, ends in (('a.svg', b'<?xml', b'</svg>\n'), ('b.PNG', b'\x89PNG', b'IEND\xaeB`\x82'),
                                   ('c.pdf', b'%PDF', b'%%EOF\n')):
            self.run_tool('check', self.write(tool.stack()), '--figure', name)
            picture = (self.folder / name).read_bytes()
            self.assertTrue(picture.startswith(begins), picture[:20])
            self.assertTrue(picture.rstrip(b'\n').endswith(ends.rstrip(b'\n')), picture[-20:])

    def test_the_kept_script_draws_the_same(self):
        self.draw('edges', tool.stack())
        picture = self.folder / 'out.svg'
        first = texts(picture)
        picture.unlink()
        subprocess.run([GNUPLOT, '-d', 'out.svg.gp'], cwd=self.folder, check=True, capture_output=True)
        self.assertEqual(texts(picture), first)

    def test_json_is_untouched(self):
        path = self.write(tool.stack())
        plain = self.run_tool('edges', '--json', path, ROUGH).stdout
        self.assertEqual(self.run_tool('edges', '--json', path, ROUGH, '--figure', 'e.svg').stdout, plain)

    def test_hostile_texts_appear_as_they_are(self):
        before = set(os.listdir(self.folder))
        self.draw('edges', tool.stack(HOSTILE))
        shown = HOSTILE[:90].replace('\n', '\\n') + '…' * (len(HOSTILE) > 90)
        written = [text.replace('\u2060', '') for text in texts(self.folder / 'out.svg')]  # in "]]>", see figure_script.c
        self.assertIn(shown, written)
        self.assertNotIn('owned', self.files())
        subprocess.run([GNUPLOT, '-d', 'out.svg.gp'], cwd=self.folder, check=True, capture_output=True)
        self.assertEqual(set(self.files()), before | {'out.csv', 'out.svg', 'out.svg.gp', 'problem.yaml'})

    def test_pieces_of_hostile_texts(self):
        for name in ('`touch owned`', "'; system('touch owned'); '", '@HOME @x', '{/Bold:100 x}_2^3', 'a\\nb\\', '%s%n$0',
                     '</text><script>alert(1)</script>', '\u202ereversed', '日本語 Ж é', 'x' * 200):
            self.draw('check', tool.stack(name))
            shown = name.replace('\u202e', '\\u202e')
            written = texts(self.folder / 'out.svg')
            self.assertIn(shown if len(shown) <= 90 else shown[:90] + '…', written)
            self.assertNotIn('owned', self.files())

    def test_hostile_materials_and_labels(self):
        name = "`touch %s%n'"
        text = tool.stack().replace('core:', f'"{name}":').replace('fill: core', f'fill: "{name}"')
        self.draw('check', text)
        self.assertIn(f'{name} 3.4760', texts(self.folder / 'out.svg'))
        path = f'path:\n  - {{at: [0, 0], label: "{name}"}}\n  - {{at: [1, 0], label: "Γ"}}\n'
        self.draw('bands', tool.stack() + path, '--points', '2', '--count', '1')
        self.assertIn(name, texts(self.folder / 'out.svg'))
        self.assertNotIn('owned', self.files())

    def test_hostile_file_names(self):
        for name in ('|touch owned;.svg', '$(touch owned).svg', '`touch owned`.svg', "it's \"so\".svg", 'two\nlines.svg'):
            self.draw('check', tool.stack(), name=name)
            first = texts(self.folder / name)
            (self.folder / name).unlink()
            subprocess.run([GNUPLOT, '-d', f'./{name}.gp'], cwd=self.folder, check=True, capture_output=True)
            self.assertEqual(texts(self.folder / name), first)
            self.assertNotIn('owned', self.files())

    def without_gnuplot(self):
        return os.environ | {'PATH': str(self.folder)}

    def test_without_gnuplot_the_numbers_come(self):
        path = self.write(tool.stack())
        done = self.run_tool('edges', path, ROUGH, '--figure', 'e.svg', env=self.without_gnuplot(), status=3)
        self.assertIn('clearance', done.stdout)
        self.assertEqual(done.stderr.count('\n'), 1, done.stderr)
        self.assertIn('gnuplot is not installed', done.stderr)
        self.assertEqual(self.files(), ['problem.yaml'])

    def test_a_gnuplot_that_fails_is_quoted(self):
        fake = self.folder / 'gnuplot'
        fake.write_text('#!/bin/sh\nprintf half\necho >&2 "it is broken"\nexit 1\n', encoding='utf-8')
        fake.chmod(0o755)
        done = self.run_tool('edges', self.write(tool.stack()), ROUGH, '--figure', 'e.svg', env=self.without_gnuplot(),
                             status=3)
        self.assertIn('it is broken', done.stderr)
        self.assertIn('clearance', done.stdout)
        self.assertEqual(self.files(), ['gnuplot', 'problem.yaml'])

    def test_a_gnuplot_that_does_not_read(self):
        """A script longer than a pipe holds, and nobody at its other end."""
        fake = self.folder / 'gnuplot'
        fake.write_text('#!/bin/sh\nexec <&-\nexit 1\n', encoding='utf-8')
        fake.chmod(0o755)
        discs = ''.join(f'    - disc: {{fill: core, diameter_nm: 5, at_nm: [{z}, 0]}}\n' for z in range(-95, 95, 2))
        text = tool.stack().replace('lateral: uniform', 'lateral: open').replace(
            '    - stripe: {fill: core, across: z, from_nm: -50, to_nm: 50}\n', discs)
        self.run_tool('check', self.write(text), '--figure', 'e.svg', env=self.without_gnuplot(), status=3)
        self.assertEqual(self.files(), ['gnuplot', 'problem.yaml'])

    def test_a_place_that_cannot_be_written(self):
        done = self.run_tool('edges', self.write(tool.stack()), ROUGH, '--figure', 'no/such/e.svg', status=3)
        self.assertIn('clearance', done.stdout)
        self.assertIn('no/such/e.svg cannot be written', done.stderr)
        self.assertEqual(done.stderr.count('\n'), 1, done.stderr)
        self.assertEqual(self.files(), ['problem.yaml'])

    def test_a_full_disk(self):
        place = self.folder / 'small'
        place.mkdir()
        mounted = subprocess.run(['mount', '-t', 'tmpfs', '-o', 'size=4k', 'none', place], capture_output=True, check=False)
        if mounted.returncode != 0:
            self.skipTest('a small file system cannot be mounted here: ' + mounted.stderr.decode().strip())
        try:
            done = self.run_tool('edges', self.write(tool.stack()), ROUGH, '--figure', 'small/e.png', status=3)
            self.assertIn('small/e.png cannot be written', done.stderr)
            self.assertIn('clearance', done.stdout)
            self.assertEqual(list(place.iterdir()), [])
        finally:
            subprocess.run(['umount', place], check=True)

    def test_an_old_picture_stays_when_the_new_one_fails(self):
        (self.folder / 'e.svg').write_text('old', encoding='utf-8')
        self.run_tool('check', self.write(tool.stack()), '--figure', 'e.svg', env=self.without_gnuplot(), status=3)
        self.assertEqual((self.folder / 'e.svg').read_text(encoding='utf-8'), 'old')

    def test_wrong_words(self):
        path = self.write(tool.stack())
        self.assert_refused('edges', path, '--figure', 'e.bmp', says=['e.bmp', '.svg, .png or .pdf'])
        self.assert_refused('edges', path, '--figure', '.svg', says=['.svg, .png or .pdf'])
        self.assert_refused('edges', path, '--keep-script', says=['--figure'])
        self.assert_refused('aim', path, '--figure', 'e.svg', says=['no picture of picket aim'])
        self.assert_refused('edges', path, '--figure', 'e.svg', '--sweep', 'cell.pitch_nm=190,200', says=['a sweep'])

    def test_nothing_to_draw(self):
        done = self.run_tool('check', self.write(tool.film()), '--figure', 'e.svg', status=2)
        self.assertIn('no cell, section or channel to draw', done.stderr)
        self.assertIn('slab', done.stdout)


if __name__ == '__main__':
    unittest.main()
