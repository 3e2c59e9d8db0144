import fc from 'fast-check';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';
import { Core, MAGNETIC_CONSTANT, teslaPerAmpere } from '../../../sim/hardware/core.ts';
import { nominalUnit, type CoreUnit } from '../../../sim/hardware/draw.ts';
import { RandomStream } from '../../../sim/hardware/random.ts';
import { probeOf, quietProbe } from '../probes.ts';

const PLAIN = nominalUnit(probeOf(quietProbe({}))).core;
const REFERENCES = fileURLToPath(new URL('../../references/', import.meta.url));
const STEP_SECONDS = 1e-6;

/** Typical MnZn power ferrite, handbook values from memory. */
const PLAY = { coercivity_A_per_m: 15, remanence_T: 0.12, saturation_T: 0.49, loopFile: '' };
const JILES_ATHERTON = {
  saturation_kA_per_m: 380, shape_A_per_m: 22, coupling: 4e-5, pinning_A_per_m: 14, reversibility: 0.3,
};

function coreUnit(change: Partial<CoreUnit> = {}): CoreUnit {
  return { ...PLAIN, ...change };
}

function newCore(change: Partial<CoreUnit> = {}, jointTolerance_um = 0): Core {
  return new Core(coreUnit(change), {
    stepSeconds: STEP_SECONDS, folder: REFERENCES, closing: new RandomStream(7, 1, 'closing'), jointTolerance_um,
  });
}

function field(core: Core, amperes: number[], outerTesla = 0, neighbourAmperes = 0, coil: number[] | null = null) {
  const values = Float64Array.from(amperes);
  core.process(values, values.length, outerTesla, neighbourAmperes, coil === null ? null : Float64Array.from(coil));
  return [...values];
}

function fieldTesla(turns: number, amperes: number, gap_mm: number, path_mm: number, permeability: number): number {
  return field(newCore({ turns, gap_mm, path_mm, permeability }), [amperes])[0];
}

function decaying(amplitude: number, points: number, period: number, timeConstant: number): number[] {
  return Array.from({ length: points }, (_, i) =>
    amplitude * Math.exp(-i / timeConstant) * Math.sin((2 * Math.PI * i) / period));
}

describe('core without memory', () => {
  test.each([
    // computed in Python from B = mu0 N I/(lg + lc/mur) with mu0 = 4 pi e-7, which is within 2e-10 of CODATA 2022
    [100, 2, 80, 2200, 61.709855695514], [10, 1, 60, 2000, 12.200359819766], [30, 3, 100, 2300, 12.386851034154],
  ])('%s A, gap %s mm, path %s mm, permeability %s -> %s mT', (amperes, gap, path, permeability, milliTesla) => {
    expect(Math.abs(1e3 * fieldTesla(1, amperes, gap, path, permeability) / milliTesla - 1)).toBeLessThan(1e-9);
  });

  test('textbook core: 1 T needs 0.80 A in 500 turns', () => {
    // Fitzgerald, Kingsley, Umans, "Electric Machinery", example 1.1 (from memory): printed to two figures, so 1 %
    expect(Math.abs(fieldTesla(500, 0.8, 0.5, 300, 70000) - 1)).toBeLessThan(0.01);
  });

  test('textbook toroid: 0.2 T needs 6.5915 A in 100 turns', () => {
    // classic problem: mean diameter 10 cm, permeability 100, gap 1 mm, full core length; current computed by hand
    expect(Math.abs(fieldTesla(100, 6.5915, 1, 100 * Math.PI, 100) / 0.2 - 1)).toBeLessThan(1e-5);
  });

  test('relative to an ideal core the field is low by (path/permeability)/(gap + path/permeability)', () => {
    const double = (min: number, max: number) => fc.double({ min, max, noNaN: true });
    fc.assert(fc.property(double(0.01, 100), double(1, 2000), double(1, 1e6), (gap, path, permeability) => {
        const ideal = (4e-7 * Math.PI) / (gap * 1e-3);
        const low = path / permeability / (gap + path / permeability);
        // 1e-9: the two values of mu0
        expect(Math.abs(fieldTesla(1, 1, gap, path, permeability) / ideal - (1 - low))).toBeLessThan(1e-9);
      }));
  });
});

describe('every core', () => {
  const memories: [string, Partial<CoreUnit>][] = [
    ['linear', {}], ['play', { play: PLAY }],
    ['play fitted to a loop', { play: { ...PLAY, loopFile: 'ferriteloops.csv' } }],
    ['Jiles-Atherton', { jilesAtherton: JILES_ATHERTON, permeability: 5000 }],
  ];

  test.each(memories.slice(0, 3))('%s: a small current gives teslaPerAmpere, joint and position in it', (_, memory) => {
    const change = { ...memory, jointGap_um: 40, position_percent: -1.5, turns: 3 };
    // no operator moves at 1e-6 A, and the curve bends by E/knee < 1e-6
    const tesla = field(newCore(change), [1e-6])[0];
    expect(Math.abs(tesla / 1e-6 / teslaPerAmpere(coreUnit(change)) - 1)).toBeLessThan(1e-6);
  });

  test('Jiles-Atherton: a small current sees its initial susceptibility', () => {
    const tesla = field(newCore({ jilesAtherton: JILES_ATHERTON }), [1e-4])[0];
    // c Ms/(3a) with the coupling of the anhysteretic slope: X = c m/(1 - alpha c m), m = Ms/(3a)
    const slope = (JILES_ATHERTON.reversibility * 380e3) / 66;
    const permeability = 1 + slope / (1 - JILES_ATHERTON.coupling * slope);
    // the irreversible part sets in with H/k: 1e-5 at 1e-4 A
    expect(Math.abs(tesla / 1e-4 / teslaPerAmpere(coreUnit({ permeability })) - 1)).toBeLessThan(1e-4);
  });

  test.each(memories)('%s: how the input is cut into blocks changes nothing', (_, memory) => {
    const inputs = decaying(400, 60, 17, 40);
    const whole = field(newCore({ ...memory, eddy_kHz: 50 }), inputs);
    for (const cut of [1, 13, 59]) {
      const core = newCore({ ...memory, eddy_kHz: 50 });
      expect([...field(core, inputs.slice(0, cut)), ...field(core, inputs.slice(cut))]).toEqual(whole);
    }
  });

  test.each(memories)('%s: the open jaw leaves its share', (name, memory) => {
    const core = newCore({ ...memory, openJaw_percent: 2 });
    const closed = field(core, [0, 5])[1];
    core.openJaw();
    const open = field(core, [5])[0];
    // the share is that of small signals; a memory adds at most what coercivity drives through the long gap
    const bound = 0.02 * 1.2 * teslaPerAmpere(coreUnit(memory));
    expect(Math.abs(open - 0.02 * closed)).toBeLessThan(name === 'linear' ? 1e-15 : bound);
  });

  test.each(memories.slice(1))('%s: an overload leaves remanence, a decaying coil current takes it', (_, memory) => {
    const core = newCore({ ...memory, coilTurns: 50 });
    const perAmpere = teslaPerAmpere(coreUnit(memory));
    const remanenceAmperes = field(core, [0, 2000, 0])[2] / perAmpere;
    expect(remanenceAmperes).toBeGreaterThan(0.1);
    const coil = decaying(20, 8000, 40, 600);
    field(core, coil.map(() => 0), 0, 0, coil);
    // amplitudes fall by exp(-20/600) from one half period to the next, and the remanence ends at that share of it
    expect(Math.abs(field(core, [0])[0] / perAmpere)).toBeLessThan(0.05 * remanenceAmperes);
  });

  test.each(memories.slice(1, 3))('%s: the remanence of an overload outlives an ordinary current', (_, memory) => {
    const core = newCore(memory);
    const [, , remanence] = field(core, [0, 2000, 0]);
    // 10 A move H by 3 A/m at most (B of 6 mT over mu0 2200), and only operators below that forget
    field(core, Array.from({ length: 400 }, (_unused, i) => 10 * Math.sin((2 * Math.PI * i) / 40)));
    const kept = field(core, [0])[0];
    expect(kept).toBeGreaterThan(0.5 * remanence);
    // return-point memory: the first period takes all that such a current can take
    field(core, Array.from({ length: 4000 }, (_unused, i) => 10 * Math.sin((2 * Math.PI * i) / 40)));
    expect(Math.abs(field(core, [0])[0] - kept)).toBeLessThan(1e-15);
  });

  test('Jiles-Atherton creeps: an ordinary alternating current takes most of the remanence, period by period', () => {
    // its minor loops do not close (D. C. Jiles, IEEE Trans. Magn. 28 (1992) 2602, from memory): a limit of the model
    const core = newCore({ jilesAtherton: JILES_ATHERTON });
    const [, , remanence] = field(core, [0, 2000, 0]);
    field(core, Array.from({ length: 400 }, (_unused, i) => 10 * Math.sin((2 * Math.PI * i) / 40)));
    expect(Math.abs(field(core, [0])[0])).toBeLessThan(0.1 * remanence);
  });

  test.each(memories)('%s: degaussed at once it is as new', (_, memory) => {
    const core = newCore(memory);
    field(core, [0, 700, -300, 50]);
    core.degauss();
    const inputs = [10, -20, 100];
    field(newCore(memory), inputs).forEach((tesla, i) => expect(field(core, [inputs[i]])[0]).toBe(tesla));
  });
});

test('remanence after an overload: the loop from saturation on the line of the gap, at most Hc path/N', () => {
  const turns = 2;
  const unit = coreUnit({ play: PLAY, turns });
  const remanence = field(newCore({ play: PLAY, turns }), [0, 1e5, 0])[2];
  const [path, gap, knee] = [unit.path_mm * 1e-3, unit.gap_mm * 1e-3, 15 * (0.49 / 0.12 - 1)];
  // J. H. Chan et al., IEEE Trans. CAD 10 (1991) 476: upper branch, solved with path H + gap B/mu0 = 0 by bisection
  const tesla = (h: number): number => (0.49 * (h + 15)) / (Math.abs(h + 15) + knee) + MAGNETIC_CONSTANT * h;
  let [low, high] = [-15, 0];
  for (let i = 0; i < 100; i++) {
    const h = (low + high) / 2;
    if (path * h + (gap * tesla(h)) / MAGNETIC_CONSTANT < 0) low = h;
    else high = h;
  }
  expect(Math.abs(remanence / tesla(high) - 1)).toBeLessThan(1e-9); // bisection to rounding of H near -15
  // the bound in amperes is Hc path/N = 0.6 A, each worth mu0 N/gap: all of Hc path falls across the gap
  const bound = (15 * path) / turns;
  expect(remanence).toBeLessThan((bound * MAGNETIC_CONSTANT * turns) / gap);
  expect(remanence).toBeGreaterThan(0.9 * bound * teslaPerAmpere(unit)); // little of it is left for the core here
});

describe('what else reaches the gap', () => {
  test('neighbour, coil, position and turns are ampere-turns', () => {
    const perTurn = teslaPerAmpere(coreUnit());
    const core = newCore({ turns: 4, position_percent: 2, neighbour_ppm: 300, coilTurns: 25 });
    const [tesla] = field(core, [10], 0, -50, [0.2]);
    const ampereTurns = 4 * 1.02 * 10 - 4 * 300e-6 * 50 + 25 * 0.2;
    expect(Math.abs(tesla / (ampereTurns * perTurn) - 1)).toBeLessThan(1e-14);
  });

  test('an outer field is concentrated by the closed core and stays as it is while the jaw is open', () => {
    const core = newCore({ concentration: 3, openJaw_percent: 0 });
    expect(field(core, [0], 50e-6)[0]).toBe(3 * 50e-6);
    core.openJaw();
    // no sensitivity left is taken as 1e-9 of it
    expect(Math.abs(field(core, [100], 50e-6)[0] - 50e-6)).toBeLessThan(1.01e-7 * teslaPerAmpere(coreUnit()));
    core.closeJaw();
    expect(field(core, [0], -50e-6)[0]).toBe(-3 * 50e-6);
  });

  test('each closing draws the joint gap anew within its tolerance, the same for the same stream', () => {
    const change = { jointGap_um: 30 };
    const gaps = (core: Core): number[] => Array.from({ length: 200 }, () => {
      core.openJaw();
      core.closeJaw();
      const metres = MAGNETIC_CONSTANT / field(core, [1])[0] - (PLAIN.path_mm * 1e-3) / PLAIN.permeability;
      return (metres - PLAIN.gap_mm * 1e-3) * 1e6;
    });
    const drawn = gaps(newCore(change, 20));
    expect(gaps(newCore(change, 20))).toEqual(drawn);
    expect(new Set(drawn).size).toBe(200);
    // 1e-6 um: rounding. Even within 10 to 50 um: 200 draws leave the outer tenths empty with 0.9^200 = 7e-10
    expect(Math.min(...drawn)).toBeGreaterThan(10 - 1e-6);
    expect(Math.max(...drawn)).toBeLessThan(50 + 1e-6);
    expect(Math.min(...drawn)).toBeLessThan(14);
    expect(Math.max(...drawn)).toBeGreaterThan(46);
    // beyond the nominal gap none becomes negative
    gaps(newCore({ jointGap_um: 5 }, 20)).forEach((um) => expect(um).toBeGreaterThan(-1e-6));
  });

  test('eddy currents: the field lags as one pole does, exactly, behind a ramp of current', () => {
    const corner = 20e3;
    const tau = 1 / (2 * Math.PI * corner);
    const ramp = Array.from({ length: 200 }, (_, i) => i);
    const perAmpere = teslaPerAmpere(coreUnit());
    field(newCore({ eddy_kHz: corner / 1e3 }), ramp).forEach((tesla, i) => {
      // textbook response of a first-order lag to a ramp of 1 A a step: t - tau (1 - exp(-t/tau))
      const steps = i - (tau / STEP_SECONDS) * (1 - Math.exp((-i * STEP_SECONDS) / tau));
      expect(Math.abs(tesla / perAmpere - steps)).toBeLessThan(1e-11); // rounding of up to 200 A
    });
  });

  test('two memories at once, and a play model that is half described, are refused', () => {
    expect(() => newCore({ play: PLAY, jilesAtherton: JILES_ATHERTON })).toThrow(/both play and jilesAtherton/);
    expect(() => newCore({ play: { ...PLAY, remanence_T: null } })).toThrow(/neither loopFile nor all of/);
  });
});
