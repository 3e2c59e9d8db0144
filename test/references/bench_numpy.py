#!/usr/bin/env python3
"""The hardware of a probe on a PWM current by NumPy and SciPy, to compare the speed of `npm run bench` with.

Reads {current, core, sensor, coupling, amplifier, converter, stepSeconds, gridFactor, samples, rounds} as JSON (nominal
values in the units of a probe file), computes current, truth, core with play memory, sensor with white, 1/f and
wandering noise, coupling, amplifier with slew limit and rails, RC filter and converter, and writes median seconds, mean
and standard deviation of the codes. Vectorised where NumPy can: the core goes from turn to turn of the current, the
poles are lfilter with the weights of a first-order hold, the slew limit and the recovery loop only where they act.
Noises come from NumPy's generator, 1/f noise by shaping a spectrum, so codes agree in their statistics only.
"""
import json
import math
import statistics
import sys
import time

import numpy as np
from scipy.signal import lfilter

MU0 = 1.25663706127e-6
OPERATORS = 32


def pole(x, corner, step):
    """One pole for straight lines between points, steady before the first one."""
    r = 2 * math.pi * corner * step
    keep, moved = math.exp(-r), -math.expm1(-r)
    k1 = 1 - moved / r
    y, _ = lfilter([k1, moved - k1], [1, -keep], x, zi=[(moved - k1 + keep) * x[0]])
    return y


def trapezoid(c, step, n):
    phase = np.arange(n) * (c['frequency_Hz'] * step) % 1
    edge = max(c['edge_us'] * 1e-6 * c['frequency_Hz'], 1e-12)
    duty = c['duty_percent'] / 100
    corners = [0, edge / 2, duty - edge / 2, duty + edge / 2, 1 - edge / 2, 1]
    middle = (c['low_A'] + c['high_A']) / 2
    return np.interp(phase, corners, [middle, c['high_A'], c['high_A'], c['low_A'], c['low_A'], middle])


def play_core(amperes, core):
    """B in the gap; branch by branch, the play operators as a chain of straight lines in H, a quadratic on each."""
    path, gap = core['path_mm'] * 1e-3, core['gap_mm'] * 1e-3
    hc, br, bs = (core['play'][k] for k in ('coercivity_A_per_m', 'remanence_T', 'saturation_T'))
    knee = hc * (bs / br - 1)
    reversible = (core['permeability'] - 1) / (bs / (knee * MU0))
    thresholds = (np.arange(OPERATORS) + 0.5) * 2 * hc / (1 - reversible) / OPERATORS
    weights = np.full(OPERATORS, (1 - reversible) / OPERATORS)
    turns = amperes * core['turns'] * (1 + core['position_percent'] / 100)

    change = np.diff(turns, prepend=0.0)
    moving = np.flatnonzero(change)
    signs = np.sign(change[moving])
    starts = np.concatenate(([0], moving[1:][signs[1:] != signs[:-1]], [len(turns)]))
    starts = np.unique(starts)
    held, field, out = np.zeros(OPERATORS), 0.0, np.empty_like(turns)
    for first, end in zip(starts[:-1], starts[1:]):
        last = turns[end - 1]
        sense = 1.0 if last >= (turns[first - 1] if first > 0 else 0.0) else -1.0
        # mirrored so that the field rises: an operator moves once H is at its output plus its threshold
        begin, outputs = sense * field, sense * held
        corners = np.concatenate(([begin], np.maximum(begin, outputs + thresholds)))
        slopes = reversible + np.concatenate(([0.0], np.cumsum(weights)))
        effective = reversible * begin + weights @ outputs + np.concatenate(
            ([0.0], np.cumsum(slopes[:-1] * np.diff(corners))))
        at_corner = corners * path + gap / MU0 * (bs * effective / (np.abs(effective) + knee) + MU0 * corners)
        wanted = sense * turns[first:end]
        place = np.clip(np.searchsorted(at_corner, wanted, side='right') - 1, 0, OPERATORS)
        h0, e0, s0 = corners[place], effective[place], slopes[place]
        # on a line E = e0 + s0 (H - h0): a |E|^2 + (a knee + K - |c|) |E| - |c| knee = 0
        a = (path + gap) / s0
        c = wanted - (path + gap) * h0 + a * e0
        b = a * knee + gap / MU0 * bs - np.abs(c)
        root = np.sqrt(b * b + 4 * a * knee * np.abs(c))
        e = np.copysign(np.where(b > 0, 2 * knee * np.abs(c) / (b + root), (root - b) / (2 * a)), c)
        h = h0 + (e - e0) / s0
        out[first:end] = sense * (bs * e / (np.abs(e) + knee) + MU0 * h)
        field = sense * h[-1]
        held = np.maximum(field - thresholds, np.minimum(field + thresholds, held))
    return out


def sensor_volts(tesla, s, step, rng):
    n = len(tesla)
    density = s['noise_uT_per_rtHz'] * 1e-6
    slow = np.zeros(n)
    if s['noiseCorner_Hz'] > 0:
        hertz = np.fft.rfftfreq(n, step)
        shape = np.zeros(len(hertz))
        shape[1:] = np.sqrt(s['noiseCorner_Hz'] / hertz[1:])
        slow += np.fft.irfft(np.fft.rfft(rng.standard_normal(n)) * shape, n) * (density / math.sqrt(2 * step))
    if s['wander_uT_per_rth'] > 0:
        slow += np.cumsum(rng.standard_normal(n)) * (s['wander_uT_per_rth'] * 1e-6 * math.sqrt(step / 3600))
    corner = s['bandwidth_kHz'] * 1e3
    volts = pole(s['rest_V'] + s['sensitivity_mV_per_mT'] * (tesla + slow), corner, step)
    keep = math.exp(-2 * math.pi * corner * step)
    deviation = s['sensitivity_mV_per_mT'] * density * math.sqrt(math.pi / 2 * corner)
    draws = rng.standard_normal(n) * (deviation * math.sqrt(1 - keep * keep))
    draws[0] = deviation * rng.standard_normal()
    return np.clip(volts + lfilter([1], [1, -keep], draws), s['swingLow_V'], s['swingHigh_V'])


def amplifier_volts(volts, a, step):
    wanted = a['virtualGround_V'] + a['gain'] * (volts - a['virtualGround_V'] + a['offset_mV'] * 1e-3)
    low, high = a['railLow_V'], a['railHigh_V']
    most = math.inf if a['slew_V_per_us'] is None else a['slew_V_per_us'] * 1e6 * step
    recovery = round(a['recovery_us'] * 1e-6 / step)
    railed = wanted.min() < low or wanted.max() > high
    if np.abs(np.diff(wanted)).max() > most or (railed and recovery > 0):
        values, y, hold, rail = wanted.tolist(), float(wanted[0]), 0, 0.0
        for i, w in enumerate(values):
            if hold > 0:
                hold = recovery if (w > high if rail == high else w < low) else hold - 1
                y = rail
            else:
                y = min(max(w, y - most), y + most)
                if y < low or y > high:
                    y = rail = high if y > high else low
                    hold = recovery
            values[i] = y
        wanted = np.array(values)
    else:
        wanted = np.clip(wanted, low, high)
    return pole(wanted, a['bandwidth_kHz'] * 1e3, step)


def codes_of(given, rng):
    step, factor, n = given['stepSeconds'], given['gridFactor'], given['samples'] * given['gridFactor']
    amperes = trapezoid(given['current'], step, n)
    periods = amperes.reshape(-1, factor)
    truth = periods.mean(axis=1), (periods * periods).mean(axis=1), periods[:, -1]
    tesla = play_core(amperes, given['core'])
    volts = sensor_volts(tesla, given['sensor'], step, rng)
    if given['coupling'] is not None:
        volts += given['coupling']['loop_mm2'] * 1e-6 / step * np.diff(tesla, prepend=tesla[0])
    volts = amplifier_volts(volts, given['amplifier'], step)[factor - 1::factor]
    c = given['converter']
    x = volts * (2 ** c['bits'] / c['reference_V']) + c['noise_codes'] * rng.standard_normal(len(volts))
    return np.clip(np.floor(x + 0.5), 0, 2 ** c['bits'] - 1).astype(np.int32), truth


def main():
    given = json.load(sys.stdin)
    rng = np.random.default_rng(1)
    codes_of({**given, 'samples': min(1000, given['samples'])}, rng)
    times = []
    for _ in range(given['rounds']):
        start = time.perf_counter()
        codes, _ = codes_of(given, rng)
        times.append(time.perf_counter() - start)
    settled = codes[len(codes) // 10:]
    json.dump({'seconds': statistics.median(times), 'meanCode': float(settled.mean()),
               'deviationCodes': float(settled.std())}, sys.stdout)


main()
