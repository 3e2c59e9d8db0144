import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { MAGNETIC_CONSTANT } from '../../../sim/hardware/magnetic.ts';
import { PlayCircuit } from '../../../sim/hardware/playcircuit.ts';
import { froehlichMaterial, materialFromLoop, type PlayMaterial } from '../../../sim/hardware/playmaterial.ts';

const MU0 = MAGNETIC_CONSTANT;

/** Typical MnZn power ferrite, handbook values from memory. */
const FERRITE = { coercivity: 15, remanence: 0.12, saturation: 0.49, permeability: 2200 };

function ferrite(): PlayMaterial {
  return materialFromLoop(FERRITE.coercivity, FERRITE.remanence, FERRITE.saturation, FERRITE.permeability);
}

function play(circuit: PlayCircuit, ampereTurns: number[]): number[] {
  const values = Float64Array.from(ampereTurns);
  circuit.process(values, values.length);
  return [...values];
}

/** A ring of 1 m without gap: ampere-turns are then the field in A/m. */
function ring(material: PlayMaterial): PlayCircuit {
  return new PlayCircuit(material, 1, 0);
}

/** E is B here: a curve that saturates only at 1e12 A/m leaves the operators as they are, to 1e-10 at 100 A/m. */
function straight(reversible: number, thresholds: number[], weights: number[]): PlayMaterial {
  return {
    saturationTesla: 1e12, knee: 1e12, reversible, thresholds: Float64Array.from(thresholds),
    weights: Float64Array.from(weights), airPermeability: 0,
  };
}

/** Another structure: every operator stepped by its definition, and the field found by bisection. */
class Oracle {
  private readonly held: Float64Array;

  constructor(private readonly material: PlayMaterial, private readonly path: number, private readonly gap: number) {
    this.held = new Float64Array(material.thresholds.length);
  }

  step(turns: number): number {
    let low = -1e7;
    let high = 1e7;
    for (let i = 0; i < 200; i++) {
      const middle = (low + high) / 2;
      if (middle * this.path + (this.tesla(middle) * this.gap) / MU0 < turns) low = middle;
      else high = middle;
    }
    const tesla = this.tesla(high);
    for (let i = 0; i < this.held.length; i++) this.held[i] = this.moved(i, high);
    return tesla;
  }

  private moved(i: number, field: number): number {
    const threshold = this.material.thresholds[i];
    return Math.max(field - threshold, Math.min(field + threshold, this.held[i]));
  }

  private tesla(field: number): number {
    const { reversible, weights, saturationTesla, knee, airPermeability } = this.material;
    let effective = reversible * field;
    for (let i = 0; i < weights.length; i++) effective += weights[i] * this.moved(i, field);
    return (saturationTesla * effective) / (Math.abs(effective) + knee) + airPermeability * field;
  }
}

describe('one play operator', () => {
  test('the sequence 0, 2, 0.5, -1.5, 3, 1.2 with threshold 1 gives 0, 1, 1, -0.5, 2, 2', () => {
    // I. D. Mayergoyz, "Mathematical Models of Hysteresis": the play operator by its definition
    const inputs = [0, 2, 0.5, -1.5, 3, 1.2];
    // a reversible share of 1e-6 is there because a dead zone without slope would leave the field undetermined
    const got = play(ring(straight(1e-6, [1], [1])), inputs);
    const expected = [0, 1, 1, -0.5, 2, 2];
    // H is exact to rounding over the slope, 2e-16/1e-6, the curve of 1e12 bends by 1e-12
    got.forEach((value, i) => expect(Math.abs(value - expected[i] - 1e-6 * inputs[i])).toBeLessThan(1e-9));
  });
});

describe('Rayleigh loop by play operators of even density (Lord Rayleigh, Phil. Mag. 23 (1887) 225)', () => {
  const chi = 1000;
  const nu = 2;
  const top = 50;

  function rayleigh(operators: number): PlayCircuit {
    const width = top / operators;
    return ring(straight(chi, Array.from({ length: operators }, (_, i) => (i + 0.5) * width),
      new Array<number>(operators).fill(2 * nu * width)));
  }

  test.each([20, 40, 80])('virgin curve, descending branch and remanence with %s operators', (operators) => {
    const circuit = rayleigh(operators);
    // midpoint rule: an operator stands for thresholds within half a width, which misses at most density width^2/8
    const bound = (2 * nu * (top / operators) ** 2) / 8 + 1e-9; // 1e-9: rounding of up to 55000
    // the curve of 1e12 takes M^2/1e12 away
    const virgin = play(circuit, [12.5, 25, 37.3, 50]);
    [12.5, 25, 37.3, 50].forEach((h, i) =>
      expect(Math.abs(virgin[i] - (chi * h + nu * h * h))).toBeLessThan(bound + virgin[i] ** 2 / 1e12));
    const falling = [40, 25, 11.1, 0, -2.2680508593630293, -25, -50];
    const branch = play(circuit, falling);
    falling.forEach((h, i) => {
      const exact = (chi + nu * top) * h + (nu / 2) * (top * top - h * h);
      // twice: on the way back from a turn an operator has to move by twice its threshold
      expect(Math.abs(branch[i] - exact)).toBeLessThan(2 * bound + exact ** 2 / 1e12);
    });
  });

  test('loss 4/3 mu0 nu Hm^3 for each cycle', () => {
    const circuit = rayleigh(40);
    const points = 4000;
    const inputs = Array.from({ length: 2 * points }, (_, i) => top * Math.cos((2 * Math.PI * i) / points));
    const out = play(circuit, inputs);
    let loss = 0;
    for (let i = points; i < 2 * points; i++) {
      loss += (MU0 / 2) * (inputs[i] + inputs[i - 1]) * (out[i] - out[i - 1]);
    }
    // the loop of one operator has the area 4 r (Hm - r); summed at midpoints r^2 misses Hm width^2/12, which is
    // 1/(2 n^2) of the loss; trapezoids cut its corners by (0.08 A/m)^2/2, 3e-6 of the mean area of 1700
    expect(Math.abs(loss / 0.4188790204786391 - 1)).toBeLessThan(1 / (2 * 40 ** 2) + 1e-5);
    expect(Math.abs(loss / 0.4188790204786391 - 1)).toBeGreaterThan(0.9 / (2 * 40 ** 2));
  });
});

describe('play model', () => {
  const turns = fc.array(fc.oneof(
    fc.double({ min: -5, max: 5, noNaN: true }), fc.double({ min: -500, max: 500, noNaN: true }),
    fc.constantFrom(0, -0, 1e5, -1e5, 1e-9),
  ), { minLength: 1, maxLength: 40 });

  test('the same flux as operators stepped one by one with the field found by bisection', () => {
    fc.assert(fc.property(turns, fc.constantFrom(0, 1e-5, 2e-3, 10), (inputs, gap) => {
      const circuit = new PlayCircuit(ferrite(), 0.08, gap);
      const oracle = new Oracle(ferrite(), 0.08, gap);
      const got = play(circuit, inputs);
      inputs.forEach((input, i) => {
        const expected = oracle.step(input);
        // bisection from 1e7 A/m stops at a few units in the last place of H, up to 1e6 A/m: 1e-9 A/m at a slope of
        // at most 0.011 T/(A/m); a gap adds rounding of N I over its length
        expect(Math.abs(got[i] - expected)).toBeLessThan(1e-11 + 1e-12 * Math.abs(expected));
      });
    }));
  });

  test('wiping-out: a larger excursion erases the smaller ones before it', () => {
    for (const gap of [0, 0.002]) {
      const scale = gap === 0 ? 5 : 60;
      const winding = new PlayCircuit(ferrite(), 0.08, gap);
      const direct = new PlayCircuit(ferrite(), 0.08, gap);
      play(winding, [0, 5, 1, 4, 5].map((x) => x * scale));
      play(direct, [0, 5].map((x) => x * scale));
      for (const next of [3, -1, 6, 0]) {
        expect(Math.abs(play(winding, [next * scale])[0] - play(direct, [next * scale])[0])).toBeLessThan(1e-14);
      }
    }
  });

  test('congruency: minor loops of the operators between the same fields have the same height after any past', () => {
    const model = straight(1e-3, [0.5, 1, 2, 4, 8], [1, 2, 3, 2, 1]);
    const heightAfter = (history: number[]): number => {
      const circuit = ring(model);
      const loop = play(circuit, [...history, 3, -2, 3, -2]).slice(-2);
      return loop[0] - loop[1];
    };
    const plain = heightAfter([]);
    expect(plain).toBeGreaterThan(1);
    for (const history of [[30], [-30], [20, -10, 15], [-20, 9]]) {
      // the curve of 1e12 bends a sum of up to 270 by 270^2/1e12 at each end
      expect(Math.abs(heightAfter(history) - plain)).toBeLessThan(2 * 270 ** 2 / 1e12);
    }
  });

  test('rate independence: points between two extremes change nothing, nor does the cut into blocks', () => {
    fc.assert(fc.property(turns, fc.integer({ min: 1, max: 7 }), (inputs, between) => {
      const coarse = play(new PlayCircuit(ferrite(), 0.08, 0.002), inputs);
      const fine = new PlayCircuit(ferrite(), 0.08, 0.002);
      let before = 0;
      inputs.forEach((input, i) => {
        const way = Array.from({ length: between }, (_, k) => before + ((input - before) * (k + 1)) / between);
        way[between - 1] = input;
        const last = way.map((turn) => play(fine, [turn])[0])[between - 1];
        // rounding only: of N I up to 1e5 over a gap of 2 mm
        expect(Math.abs(last - coarse[i])).toBeLessThan(1e-12 + 1e-13 * Math.abs(coarse[i]));
        before = input;
      });
    }));
  });
});

describe('loop from saturation (J. H. Chan et al., IEEE Trans. CAD 10 (1991) 476)', () => {
  test('Bs = 0.49, Br = 0.12, Hc = 20: upper branch at -100, -20, 0, 20, 100, 1000 A/m', () => {
    const material = { ...materialFromLoop(20, 0.12, 0.49, 2200), airPermeability: 0 }; // mu0 H is left out there
    const circuit = ring(material);
    play(circuit, [1e4]);
    const fields = [1000, 100, 20, 0, -20, -100];
    const expected = [0.4620647149460709, 0.3236697247706422, 0.19278688524590168, 0.12, 0, -0.2767058823529412];
    play(circuit, fields).forEach((tesla, i) => expect(Math.abs(tesla - expected[i])).toBeLessThan(1e-12));
  });

  test('the initial slope is the permeability', () => {
    for (const permeability of [1.5, 100, 2200, 5000]) {
      const material = materialFromLoop(20, 0.12, 0.49, permeability);
      // half of the first threshold: no operator moves; the curve bends by E/knee, E <= 1e-6 A/m
      const slope = play(ring(material), [1e-6])[0] / 1e-6 / MU0;
      // 0.01: the least reversible share
      expect(Math.abs(slope - permeability)).toBeLessThan(0.01 + 1e-6 * permeability);
    }
  });

  test('a permeability above the steepest slope of the loop, and a remanence beyond saturation, are refused', () => {
    expect(() => materialFromLoop(20, 0.12, 0.49, 10000)).toThrow(/core\.permeability: found 10000, allowed at most/);
    expect(() => materialFromLoop(20, 0.5, 0.49, 1000)).toThrow(/remanence_T: found 0.5, allowed less than/);
  });
});

describe('Froehlich-Kennelly curve: B = H/(1/(mu0 mui) + |H|/Bs), computed from the formula to 12 figures', () => {
  test.each([
    [1, 0.00287331697968], [10, 0.0272927872242], [50, 0.111599713742], [100, 0.181794832958], [250, 0.291990210387],
    [1000, 0.418970071027], [1200, 0.429342927366],
  ])('without gap, %s A/m', (field, tesla) => {
    const circuit = ring(froehlichMaterial(0.49, 2300, 0));
    // 12 figures printed; the two values of mu0 differ by 2e-10
    expect(Math.abs(play(circuit, [field])[0] / tesla - 1)).toBeLessThan(5e-10);
    expect(Math.abs(play(circuit, [-field])[0] / tesla + 1)).toBeLessThan(5e-10);
  });

  test.each([
    [10, 0.00617443348609], [100, 0.0616063602491], [500, 0.300630693151], [1000, 0.465613343819],
    [2000, 0.484650088959], [5000, 0.488431198655],
  ])('with a gap of 2 mm in 80 mm, %s A', (ampereTurns, tesla) => {
    const circuit = new PlayCircuit(froehlichMaterial(0.49, 2300, 0), 0.08, 0.002);
    expect(Math.abs(play(circuit, [ampereTurns])[0] / tesla - 1)).toBeLessThan(5e-10);
  });
});
