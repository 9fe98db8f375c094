"""Progress, log, and ways to end a solve early: an answer, an exception, Ctrl-C."""

import os
import pathlib
import signal
import subprocess
import sys
import threading
import time

import picket
import pytest
from conftest import HERE, stack


def test_progress_is_told(mirror):
    told = []
    mirror.edges(progress=lambda phase, fraction: told.append((phase, fraction)))
    assert told and all(isinstance(phase, str) and 0 <= fraction <= 1 for phase, fraction in told)
    assert 'ey' in told[0][0]
    assert mirror.context.progress is None      # of that call alone


def test_progress_of_a_context():
    told = []
    context = picket.Context(progress=lambda *_: told.append(threading.current_thread()))
    problem = picket.Problem(stack(), context=context)
    problem.edges()
    assert set(told) == {threading.current_thread()}
    context.progress, before = None, len(told)
    problem.edges()
    assert len(told) == before


@pytest.mark.parametrize('study', ['edges', 'bands', 'index'])
def test_stop(mirror, study):
    asked = []

    def progress(phase, fraction):
        asked.append(fraction)
        return picket.STOP
    with pytest.raises(picket.Stopped, match='stopped on request') as caught:
        getattr(mirror, study)(progress=progress)
    assert caught.value.status is picket.Status.ERROR_STOPPED and len(asked) == 1
    assert caught.value.partial is None
    assert getattr(mirror, study)().complete      # nothing of it is left


def test_what_was_finished_is_kept():
    problem = picket.Problem(stack(wavelength_nm=[1300, 1350, 1400]))
    whole = problem.index()

    def progress(phase, fraction):
        return picket.STOP if fraction > 0.5 else picket.CONTINUE
    with pytest.raises(picket.Stopped) as caught:
        problem.index(progress=progress)
    partial = caught.value.partial
    assert not partial.complete and partial.shortfall
    done = [p for p in partial[0].points if not p.failed]
    assert 1 <= len(done) < 3 and repr(done[0]) == repr(whole[0].points[0])
    assert [p.note is None for p in partial[0].points] == [not p.failed for p in partial[0].points]


def test_an_exception_of_the_callable_comes_out(mirror):
    def progress(phase, fraction):
        raise LookupError('mine')
    with pytest.raises(LookupError, match='mine') as caught:
        mirror.edges(progress=progress)
    assert isinstance(caught.value.__cause__, picket.Stopped)
    mirror.edges()


def test_a_call_inside_a_call_is_busy(mirror):
    result, seen = mirror.edges(), []

    def progress(phase, fraction):
        for call in (mirror.check, mirror.edges, result.close, mirror.close, mirror.context.close):
            with pytest.raises(picket.BusyError) as caught:
                call()
            seen.append(caught.value.status)
        return picket.STOP
    with pytest.raises(picket.Stopped):
        mirror.edges(progress=progress)
    assert set(seen) == {picket.Status.ERROR_BUSY} and len(seen) == 5
    assert not mirror.closed and not result.closed


def test_log():
    lines = []
    context = picket.Context(log=lambda level, line: lines.append((level, line)), log_level='detail')
    picket.Problem(stack(), context=context).edges()
    assert lines and all(isinstance(level, picket.LogLevel) and '\n' not in line for level, line in lines)
    quiet = []
    context = picket.Context(log=lambda level, line: quiet.append(level), log_level=picket.LogLevel.WARNING)
    picket.Problem(stack(), context=context).edges()
    assert set(quiet) <= {picket.LogLevel.WARNING} and len(quiet) < len(lines)
    with pytest.raises(ValueError, match='loglevel'):
        picket.Context(log_level='loud')


def test_an_exception_of_the_log_comes_out():
    def log(level, line):
        raise LookupError('mine')
    problem = picket.Problem(stack(), context=picket.Context(log=log, log_level='detail'))
    with pytest.raises(LookupError, match='mine'):
        problem.edges()


def test_other_threads_run_during_a_solve():
    # The counter only advances while the solving thread does without the lock of Python; the callback is never
    # called, so that it does not do so there.
    problem = picket.Problem(stack(wavelength_nm={'from': 1300, 'to': 1500, 'points': 40}))
    problem.context.progress = None
    count, done = [0], threading.Event()

    def tick():
        while not done.wait(1e-4):
            count[0] += 1
    thread = threading.Thread(target=tick)
    thread.start()
    while not count[0]:
        time.sleep(1e-3)
    usual = sys.getswitchinterval()
    sys.setswitchinterval(3600)         # so the lock is only given away, not taken
    try:
        before = count[0]
        problem.index()
        after = count[0]
    finally:
        sys.setswitchinterval(usual)
        done.set()
        thread.join()
    assert after > before


PROGRAM = '''
import sys, picket
from conftest import stack
problem = picket.Problem(stack(wavelength_nm={{'from': 1250, 'to': 1600, 'points': 9999}}))
told = []
def progress(phase, fraction):
    if fraction > 2e-4 and not told:       # one of the 9999 is behind us
        told.append(fraction)
        print('working', flush=True)
try:
    problem.index(progress=progress, jobs={jobs})
except KeyboardInterrupt as interrupt:
    stopped = interrupt.__cause__
    finished = sum(not p.failed for p in stopped.partial[0].points)
    print('interrupted', type(stopped).__name__, 0 < finished < 9999, problem.edges().complete, flush=True)
    sys.exit(7)
'''


@pytest.mark.parametrize('jobs', [1, 2])
def test_control_c(jobs):
    path = os.pathsep.join([str(HERE.parent), str(HERE), os.environ.get('PYTHONPATH', '')])
    program = subprocess.Popen([sys.executable, '-c', PROGRAM.format(jobs=jobs)], text=True, stdout=subprocess.PIPE,
                               stderr=subprocess.PIPE, env={**os.environ, 'PYTHONPATH': path})
    try:
        assert program.stdout.readline() == 'working\n', program.stderr.read()
        program.send_signal(signal.SIGINT)
        said, complained = program.communicate(timeout=120)
    finally:
        program.kill()
    assert said == 'interrupted Stopped True True\n', complained
    assert program.returncode == 7 and complained == ''


def test_the_programs_own_handler_is_put_back(mirror):
    got = []
    usual = signal.signal(signal.SIGINT, lambda *_: got.append('mine'))
    try:
        def progress(phase, fraction):
            os.kill(os.getpid(), signal.SIGINT)
        with pytest.raises(picket.Stopped):     # this handler raises nothing
            mirror.edges(progress=progress)
        assert got == ['mine']
        os.kill(os.getpid(), signal.SIGINT)
        assert got == ['mine', 'mine']
    finally:
        signal.signal(signal.SIGINT, usual)
