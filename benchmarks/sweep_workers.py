"""A 17-point sweep of the Bloch index with one and with two workers: wall time, in turn, median of the ratios.
The figure is the machine's as much as the program's: it says something only on two idle cores."""

import json
import statistics
import subprocess
import sys
import time

FILE = sys.argv[2]
REPETITIONS = 5
GOAL = 1.7


def seconds(jobs):
    start = time.monotonic()
    subprocess.run([sys.argv[1], 'index', FILE, '--json', f'--jobs={jobs}', '--set',
                    'light.wavelength_nm={from: 1500, to: 1580, points: 17}'],
                   check=True, stdout=subprocess.DEVNULL)
    return time.monotonic() - start


ratios = [seconds(1) / seconds(2) for _ in range(REPETITIONS)]
ratio = statistics.median(ratios)
print(json.dumps({'work': '17-point index sweep: one worker / two workers, wall time', 'ratio': round(ratio, 2),
                  'goal': f'>= {GOAL}', 'meets': ratio >= GOAL, 'repetitions': REPETITIONS}))
