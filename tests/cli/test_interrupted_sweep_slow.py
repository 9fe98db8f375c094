"""Sweeps that are ended in the middle and taken up again: killed, interrupted, with a worker lost."""

import os
import random
import signal
import subprocess
import time
import unittest

import tool

ROUGH = '--accuracy=1e-2'

# Points that take a while each.
SLOW = tool.MATERIALS.format(name='row') + '''light: {wavelength_nm: {from: 1500, to: 1560, points: 4}, polarization: both}
cell: {pitch_nm: 200, cladding: oxide, shapes: [{rect: {fill: core, length_nm: 100, width_nm: 220, at_nm: [0, 0]}}]}
'''


# The same of a section: two wavelengths at each of four widths.
WIRE = tool.MATERIALS.format(name='wire') + '''light: {wavelength_nm: [1500, 1550]}
section:
  cladding: oxide
  shapes:
    - rect: {fill: core, width_nm: 450, height_nm: 220, at_nm: [0, 110]}
'''
WIDTHS = ['--count', '1', '--sweep', 'section.shapes.0.width_nm=400:460:4']


class Interrupted(tool.ToolTest):
    """Runs that are ended at random moments (the seed is fixed, the machine's speed is not). Eight pieces."""

    COMMAND, WORDS, TEXT = 'index', [], SLOW

    def words(self, *more):
        return [self.COMMAND, '--json', ROUGH, self.path, *self.WORDS, *more]

    def start(self, *words):
        return subprocess.Popen([tool.TOOL, *self.words(*words)], stdout=subprocess.PIPE, stderr=subprocess.PIPE,
                                cwd=self.folder)

    def lines(self):
        journal = self.folder / 'j'
        return journal.read_bytes().count(b'\n') if journal.exists() else 0

    def wait_for_lines(self, process, count):
        while process.poll() is None and self.lines() < count:
            time.sleep(0.002)

    def setUp(self):
        super().setUp()
        self.path = self.write(self.TEXT)
        self.whole = self.run_tool(*self.words()).stdout

    def test_killed_and_taken_up(self):
        chance = random.Random(7)
        for jobs in ('1', '2', '2'):
            (self.folder / 'j').unlink(missing_ok=True)
            for _ in range(2):
                process = self.start('--resume', 'j', '--jobs', jobs)
                self.wait_for_lines(process, self.lines() + chance.randint(1, 3))
                time.sleep(chance.random() * 0.05)
                process.send_signal(signal.SIGKILL)
                # The pipes close only when the workers are gone too.
                process.communicate(timeout=60)
            before = self.lines()
            self.assertGreater(before, 1)
            done = self.run_tool(*self.words('--resume', 'j', '--jobs', '2'))
            self.assertEqual(done.stdout, self.whole)
            self.assertEqual(self.lines(), 1 + 8)

    def test_ctrl_c_keeps_and_prints_what_was_finished(self):
        for jobs in ('1', '2'):
            (self.folder / 'j').unlink(missing_ok=True)
            process = self.start('--resume', 'j', '--jobs', jobs, '--csv', f'{jobs}.csv')
            self.wait_for_lines(process, 3)
            process.send_signal(signal.SIGINT)
            said, complained = process.communicate(timeout=60)
            self.assertEqual(process.returncode, 130, complained)
            self.assertIn(b'stopped on request', complained)
            document = tool.document(said.decode(), self.COMMAND)
            self.assertFalse(document['complete'])
            finished = [p for a in document['results'] for p in a['points'] if 'failed' not in p]
            self.assertEqual(len(finished), self.lines() - 1)
            self.assertGreaterEqual(len(finished), 2)
            self.assertIn('stopped before', (self.folder / f'{jobs}.csv').read_text(encoding='utf-8'))
            done = self.run_tool(*self.words('--resume', 'j'))
            self.assertEqual(done.stdout, self.whole)

    def test_two_runs_do_not_share_a_journal(self):
        process = self.start('--resume', 'j')
        self.wait_for_lines(process, 2)
        process.send_signal(signal.SIGSTOP)  # so that it is not done before the other one looks
        self.assertIsNone(process.poll())
        self.assert_refused(*self.words('--resume', 'j'), status=3, says=['another run'])
        process.send_signal(signal.SIGCONT)
        process.communicate(timeout=60)
        self.assertEqual(process.returncode, 0)

    def test_a_worker_that_is_killed_costs_its_point(self):
        process = self.start('--jobs', '2', '--resume', 'j')
        self.wait_for_lines(process, 2)
        with open(f'/proc/{process.pid}/task/{process.pid}/children', encoding='ascii') as children:
            worker = int(children.read().split()[0])
        os.kill(worker, signal.SIGKILL)
        said, _ = process.communicate(timeout=60)
        self.assertEqual(process.returncode, 1)
        document = tool.document(said.decode(), self.COMMAND)
        failed = [p for a in document['results'] for p in a['points'] if 'failed' in p]
        self.assertEqual(len(failed), 1)
        self.assertIn('signal 9', failed[0]['note'])
        # It is not held against the point the next time.
        done = self.run_tool(*self.words('--resume', 'j'))
        self.assertEqual(done.stdout, self.whole)


class InterruptedSection(Interrupted):
    """The same engine with other pieces."""

    COMMAND, WORDS, TEXT = 'modes', WIDTHS, WIRE


if __name__ == '__main__':
    unittest.main()
