#!/usr/bin/env python3
"""Four-parameter sine fits by SciPy, to compare sim/judging/sinefit.ts with.

Records of a sine with noise, with harmonics, with quantisation and with a start frequency that is off, each fitted by
scipy.optimize.least_squares (Levenberg-Marquardt) on amplitude, phase, offset and frequency: another algorithm than
normal equations in two passes. Writes sinefit.json beside this file.
"""
import json
import pathlib

import numpy as np
from scipy.optimize import least_squares


def fit(seconds, values, start_hz):
    middle = (seconds[0] + seconds[-1]) / 2
    t = seconds - middle
    angle = 2 * np.pi * start_hz * t
    linear, *_ = np.linalg.lstsq(np.column_stack([np.cos(angle), np.sin(angle), np.ones_like(t)]), values, rcond=None)
    half = t[-1]

    def residual(p):
        w = 2 * np.pi * start_hz + p[3] / half
        return p[0] * np.cos(w * t) + p[1] * np.sin(w * t) + p[2] - values

    found = least_squares(residual, [*linear, 0.0], method='lm', xtol=1e-15, ftol=1e-15, gtol=1e-15, x_scale=1.0)
    a, b, c, turn = found.x
    return {
        'amplitude': float(np.hypot(a, b)), 'phase': float(np.arctan2(a, b)), 'offset': float(c),
        'hertz': start_hz + float(turn / half / (2 * np.pi)), 'residualRms': float(np.sqrt(np.mean(found.fun ** 2))),
    }


def main():
    random = np.random.default_rng(20240611)
    n = 240
    seconds = np.round(3.25 + np.arange(n) / 2000.0, 9)
    cases = []

    def case(name, exact, start_hz):
        # nine decimals: the same on every processor, whose sines differ in the last bit
        values = np.round(exact, 9)
        cases.append({'name': name, 'startHz': start_hz, 'seconds': seconds.tolist(), 'values': values.tolist(),
                      'fit': {key: float(f'{value:.10g}') for key, value in fit(seconds, values, start_hz).items()}})

    turn = 2 * np.pi * 61.7 * seconds
    case('noise', 9 * np.sin(turn + 0.4) + 1.5 + 0.2 * random.standard_normal(n), 61.7)
    case('harmonics', 4 * np.cos(turn) - 0.3 + 0.08 * np.sin(2 * turn) + 0.05 * np.sin(3 * turn + 1), 61.7)
    case('quantised', np.round(20 * np.sin(turn - 2)), 61.7)
    case('start frequency off', 2.5 * np.sin(turn + 3) + 10 + 0.001 * random.standard_normal(n), 61.8)
    path = pathlib.Path(__file__).with_name('sinefit.json')
    path.write_text(json.dumps(cases, indent=None, separators=(',', ':')) + '\n')


if __name__ == '__main__':
    main()
