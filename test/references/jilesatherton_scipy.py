#!/usr/bin/env python3
"""Jiles-Atherton loops by SciPy, to compare sim/hardware/jilesatherton.ts with.

The same law in another form: the state is the irreversible part, integrated over the field H by DOP853; M is found from
it by Newton's method from M = c Ms L((H + alpha M)/a) + (1 - c) Mirr, and the gap comes in afterwards, as the
ampere-turns N I = path H + gap (H + M) that belong to each H. A point at given ampere-turns is found by a root search
on the dense solution. Langevin's function by numpy, with its series near zero. Writes jilesatherton.json beside this.
"""
import json
import pathlib

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq


def langevin(x):
    if abs(x) < 0.05:
        s = x * x
        return x * (1 / 3 - s * (1 / 45 - s * (2 / 945 - s * (1 / 4725 - s * 2 / 93555))))
    return 1 / np.tanh(x) - 1 / x


def langevin_slope(x):
    if abs(x) < 0.05:
        s = x * x
        return 1 / 3 - s * (1 / 15 - s * (2 / 189 - s * (1 / 675 - s * 2 / 10395)))
    return 1 / x**2 - 1 / np.sinh(x)**2 if abs(x) < 300 else 1 / x**2


def magnetisation(m, h, irreversible):
    value = irreversible
    for _ in range(60):
        x = (h + m['coupling'] * value) / m['shape']
        off = value - m['reversibility'] * m['saturation'] * langevin(x) - (1 - m['reversibility']) * irreversible
        slope = 1 - m['reversibility'] * m['saturation'] * langevin_slope(x) * m['coupling'] / m['shape']
        value -= off / slope
        if abs(off) < 1e-13 * m['saturation']:
            break
    return value


def branch(m, h0, irreversible0, h1, reached):
    sense = 1.0 if h1 > h0 else -1.0

    def slope(h, y):
        value = magnetisation(m, h, y[0])
        behind = m['saturation'] * langevin((h + m['coupling'] * value) / m['shape']) - y[0]
        return [0.0 if sense * behind <= 0 else behind / (sense * m['pinning'] - m['coupling'] * behind)]

    reached.terminal = True
    found = solve_ivp(slope, (h0, h1), [irreversible0], method='DOP853', rtol=1e-10, atol=1e-10 * m['saturation'],
                      dense_output=True, events=reached, max_step=min(m['shape'], m['pinning']))
    return found.sol, float(found.t[-1])


def case(name, material, path, gap, turning, points):
    """Ampere-turns from 0 to each of `turning` in turn, `points` steps for each; B/mu0 at each."""
    h, irreversible, turns = 0.0, 0.0, 0.0
    all_turns, values = [], []

    def circuit(at, sol):
        value = magnetisation(material, at, sol(at)[0])
        return path * at + gap * (at + value), at + value

    for target in turning:
        beyond = target + 0.01 * (target - turns)  # so that the root at the target lies inside
        sol, far = branch(material, h, irreversible, h + (beyond - turns) / path,  # |dH| <= |dNI|/path
                          lambda at, y: path * at + gap * (at + magnetisation(material, at, y[0])) - beyond)
        start, begin = turns, h
        for i in range(1, points + 1):
            turns = start + (target - start) * i / points
            h = brentq(lambda x: circuit(x, sol)[0] - turns, *sorted((begin, far)), xtol=1e-12, rtol=1e-14)
            all_turns.append(turns)
            values.append(float(f'{circuit(h, sol)[1]:.9g}'))
        irreversible = float(sol(h)[0])
    return {'name': name, 'material': material, 'pathMetres': path, 'gapMetres': gap, 'ampereTurns': all_turns,
            'fieldPlusMagnetisation': values}


def main():
    iron = {'saturation': 1.6e6, 'shape': 1100.0, 'coupling': 1.6e-3, 'pinning': 400.0, 'reversibility': 0.2}
    ferrite = {'saturation': 3.8e5, 'shape': 22.0, 'coupling': 4e-5, 'pinning': 14.0, 'reversibility': 0.3}
    cases = [
        case('1986 set without gap', iron, 1.0, 0.0, [5000.0, -5000.0, 5000.0, 300.0, 2000.0], 10),
        case('1986 set with a gap', iron, 0.2, 0.0005, [1500.0, -1500.0, 1500.0, 0.0], 10),
        case('soft ferrite with a gap', ferrite, 0.08, 0.002, [400.0, 0.0, 30.0, -30.0, -900.0, 0.0], 6),
    ]
    path = pathlib.Path(__file__).with_name('jilesatherton.json')
    path.write_text(json.dumps(cases, indent=None, separators=(',', ':')) + '\n')


if __name__ == '__main__':
    main()
