"""Every exit status, and what is left behind: partial results, full disks, no memory, Ctrl-C."""

import os
import pathlib
import resource
import signal
import stat
import subprocess
import time
import unittest

import tool


def closed(descriptor):
    """Closes a standard stream in the child, as a daemon's starter may."""
    return lambda: os.close(descriptor)


class Partial(tool.ToolTest):
    ROW = tool.MATERIALS.format(name='row') + '''light: {wavelength_nm: 1550, polarization: ey}
cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, width_nm: 220, at_nm: [0, 0]}}]}
'''
    SCARCE = ('--accuracy=1e-8', '--unknowns=8000')

    def test_printed_and_marked(self):
        path = self.write(self.ROW)
        done = self.run_tool('edges', path, *self.SCARCE, status=1)
        self.assertTrue(done.stdout.startswith('PARTIAL RESULT: '), done.stdout)
        self.assertIn('long edge', done.stdout)

    def test_marked_in_json_and_still_in_csv(self):
        path = self.write(self.ROW)
        done = self.run_tool('edges', '--json', '--csv', 'row.csv', path, *self.SCARCE, status=1)
        document = tool.document(done.stdout, 'edges')
        self.assertFalse(document['complete'])
        self.assertNotEqual(document['shortfall'], '')
        self.assertIn(document['shortfall'], done.stderr)
        self.assertEqual(len(document['results']), 1)
        self.assertIn('ey,1,', (self.folder / 'row.csv').read_text(encoding='utf-8'))


class Output(tool.ToolTest):
    def setUp(self):
        super().setUp()
        self.path = self.write(tool.film())

    def test_csv_replaces_a_file_and_leaves_nothing_else(self):
        self.write('old', 'out.csv')
        self.run_tool('slab', '--csv', 'out.csv', self.path)
        self.assertTrue((self.folder / 'out.csv').read_text(encoding='utf-8').startswith('polarization,'))
        self.assertEqual(sorted(p.name for p in self.folder.iterdir()), ['out.csv', 'problem.yaml'])

    def test_csv_has_the_permissions_of_new_files(self):
        mask = os.umask(0)
        os.umask(mask)
        self.run_tool('slab', '--csv', 'out.csv', self.path)
        self.assertEqual(stat.S_IMODE((self.folder / 'out.csv').stat().st_mode), 0o666 & ~mask)

    def test_csv_follows_a_link(self):
        self.write('old', 'target.csv')
        (self.folder / 'link.csv').symlink_to('target.csv')
        self.run_tool('slab', '--csv', 'link.csv', self.path)
        self.assertTrue((self.folder / 'link.csv').is_symlink())
        self.assertTrue((self.folder / 'target.csv').read_text(encoding='utf-8').startswith('polarization,'))

    def test_csv_leaves_devices_alone(self):
        self.run_tool('slab', '--csv', '/dev/null', self.path)
        self.assertTrue(stat.S_ISCHR(os.stat('/dev/null').st_mode))

    def test_csv_that_cannot_be_written(self):
        self.assert_refused('slab', '--csv', 'no/such/folder.csv', self.path, status=3, says=['no/such/folder.csv'])
        self.assert_refused('slab', '--csv', '.', self.path, status=3, says=['cannot be written'])
        self.assertEqual([p.name for p in self.folder.iterdir()], ['problem.yaml'])

    @unittest.skipUnless(os.path.exists('/dev/full'), 'no /dev/full')
    def test_a_full_disk_keeps_the_answer_on_the_screen(self):
        done = self.run_tool('slab', '--csv', '/dev/full', self.path, status=3)
        self.assertIn('guided mode', done.stdout)
        self.assertIn('/dev/full cannot be written', done.stderr)

    def test_a_wrong_problem_leaves_the_old_csv(self):
        self.write('old', 'out.csv')
        self.run_tool('slab', '--csv', 'out.csv', self.path, '--set', 'slab.cover=gone', status=2)
        self.assertEqual((self.folder / 'out.csv').read_text(encoding='utf-8'), 'old')
        self.assertEqual(sorted(p.name for p in self.folder.iterdir()), ['out.csv', 'problem.yaml'])

    @unittest.skipUnless(os.path.exists('/dev/full'), 'no /dev/full')
    def test_standard_output_on_a_full_disk(self):
        for words in (['slab', self.path], ['slab', '--json', self.path], ['--help'], ['--version']):
            with open('/dev/full', 'wb') as full:
                done = subprocess.run([tool.TOOL, *words], stdout=full, stderr=subprocess.PIPE, text=True, check=False)
            self.assertEqual(done.returncode, 3, words)
            self.assertIn('standard output cannot be written', done.stderr)

    def test_a_closed_pipe(self):
        reader, writer = os.pipe()
        os.close(reader)
        done = subprocess.run([tool.TOOL, 'slab', self.path], stdout=writer, stderr=subprocess.PIPE, text=True, check=False)
        os.close(writer)
        self.assertEqual(done.returncode, 3, done.stderr)

    def test_closed_streams_do_not_end_up_in_files(self):
        table = self.folder / 'out.csv'
        for descriptor in (0, 1, 2):
            done = subprocess.run([tool.TOOL, 'slab', '--csv', str(table), self.path], preexec_fn=closed(descriptor),
                                  capture_output=True, check=False)
            self.assertEqual(done.returncode, 3 if descriptor == 1 else 0)
            self.assertNotIn('guided', table.read_text(encoding='utf-8'))


class Memory(tool.ToolTest):
    """A thick film at many wavelengths: the JSON document outgrows what the process may have."""
    THICK = tool.film().replace('thickness_nm: 220', 'thickness_nm: 20000').replace(
        '[1500, 1550]', '{from: 1500, to: 1600, points: 600}')

    @unittest.skipIf(tool.INSTRUMENTED, 'sanitizers hold address space of their own')
    def test_out_of_memory(self):
        waiting = subprocess.Popen([tool.TOOL, 'slab', '-'], stdin=subprocess.PIPE, stdout=subprocess.PIPE)
        used = 0
        for _ in range(100):  # until the libraries are loaded: the size stays the same
            size = int(pathlib.Path(f'/proc/{waiting.pid}/statm').read_text().split()[0]) * resource.getpagesize()
            if size == used:
                break
            used = size
            time.sleep(0.05)
        waiting.communicate(tool.film().encode())
        limit = used + 12_000_000
        done = self.run_tool('slab', '--json', '--csv', 'out.csv', self.write(self.THICK), status=3,
                             preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_AS, (limit, limit)))
        self.assertIn('memory', done.stderr)
        self.assertNotIn('"results"', done.stdout)


class Interrupt(tool.ToolTest):
    """Fed through a pipe: when it has taken a problem that is larger than the pipe, it is running."""
    LONG = ''.join(f'# line {i:60d}\n' for i in range(4000)) + tool.film().replace(
        'thickness_nm: 220', 'thickness_nm: 900000').replace('[1500, 1550]', '{from: 1500, to: 1600, points: 10000}')

    def start(self, *words):
        return subprocess.Popen([tool.TOOL, *words, '-'], stdin=subprocess.PIPE, stdout=subprocess.PIPE,
                                stderr=subprocess.PIPE, cwd=self.folder)

    def test_while_working(self):
        process = self.start('slab', '--csv', 'out.csv')
        process.stdin.write(self.LONG.encode())
        process.stdin.close()
        time.sleep(0.3)
        process.send_signal(signal.SIGINT)
        said = process.stderr.read().decode()
        self.assertEqual(process.stdout.read(), b'')
        self.assertEqual(process.wait(60), 130)
        self.assertRegex(said, r'^picket: stopped on request.*\n$')
        self.assertEqual(list(self.folder.iterdir()), [])
        process.stdout.close()
        process.stderr.close()

    def test_progress_is_shown_on_a_terminal_and_taken_away(self):
        master, terminal = os.openpty()
        process = subprocess.Popen([tool.TOOL, 'slab', '-'], stdin=subprocess.PIPE, stdout=subprocess.DEVNULL,
                                   stderr=terminal)
        os.close(terminal)
        process.stdin.write(self.LONG.encode())
        process.stdin.close()
        seen = os.read(master, 1000)  # nothing comes before a second has passed
        process.send_signal(signal.SIGINT)
        self.assertEqual(process.wait(60), 130)
        seen += os.read(master, 1000)
        os.close(master)
        self.assertRegex(seen, rb'^\rslab modes, te: \d+ % *')
        self.assertRegex(seen, rb'\r +\rpicket: stopped on request')

    def test_while_waiting_for_the_problem(self):
        process = self.start('slab')
        process.stdin.write(b'# ' + b'x' * 200000)
        process.stdin.flush()
        time.sleep(0.3)
        process.send_signal(signal.SIGINT)
        self.assertEqual(process.wait(60), 130)
        self.assertIn('interrupted', process.stderr.read().decode())
        for stream in (process.stdin, process.stdout, process.stderr):
            try:
                stream.close()
            except BrokenPipeError:
                pass


if __name__ == '__main__':
    unittest.main()
