import { describe, expect, test } from 'vitest';
import { nominalGain, nominalOffsetCodes, nominalTransfer } from '../../../sim/hardware/transfer.ts';
import { exact, standProbe } from './stand.ts';

const MU0 = 1.25663706127e-6; // CODATA 2022

test('codes per ampere and rest code, by hand', () => {
  const transfer = nominalTransfer(standProbe());
  const tesla = MU0 / (2e-3 + 80e-3 / 2200);
  expect(transfer.fieldTeslaPerAmpere).toBeCloseTo(tesla, 15);
  // 50 V/T, gain 1.5, 4096 codes for 5 V
  expect(transfer.codesPerAmpere).toBeCloseTo(tesla * 50 * 1.5 * 4096 / 5, 10);
  expect(transfer.restCode).toBeCloseTo(2048, 9);
  expect(nominalOffsetCodes(standProbe(), 85)).toBe(0);
  expect(nominalGain(standProbe(), -40)).toBe(1);
});

test('the rest code counts in the numbers of the format, and an inverting amplifier turns codes per ampere', () => {
  const probe = standProbe();
  probe.converter.format = "two's complement";
  probe.amplifier.gain = exact(-1.5);
  probe.amplifier.offset_mV = exact(10);
  const transfer = nominalTransfer(probe);
  // -1.5 * 10 mV * 4096/5 V
  expect(transfer.restCode).toBeCloseTo(-12.288, 9);
  expect(transfer.codesPerAmpere).toBeLessThan(0);
});

test('only nominal values are seen: tolerances change nothing', () => {
  const probe = standProbe();
  probe.sensor.rest_V.tolerance = 0.1;
  probe.core.gap_mm.tolerance = 0.5;
  probe.supply_V.tolerance = 0.3;
  expect(nominalTransfer(probe)).toEqual(nominalTransfer(standProbe()));
});

test('holds at nominal supply, where a ratiometric sensor and a reference from the supply are like fixed ones', () => {
  const probe = standProbe();
  probe.sensor.ratiometric = true;
  probe.converter.reference = 'supply';
  expect(nominalTransfer(probe)).toEqual(nominalTransfer(standProbe()));
});

test('drift over temperature is that of the sensor through the amplifier', () => {
  const probe = standProbe();
  probe.sensor.restDrift_mV_per_K = exact(0.2);
  probe.sensor.sensitivityDrift_ppm_per_K = exact(300);
  // 0.2 mV/K * 60 K * 1.5 * 4096/5 V; 300 ppm/K * 60 K
  expect(nominalOffsetCodes(probe, 85)).toBeCloseTo(14.7456, 8);
  expect(nominalGain(probe, 85)).toBeCloseTo(1.018, 12);
  expect(nominalOffsetCodes(probe, 25)).toBe(0);
});

test('position, joint gap and a core with memory count at zero current', () => {
  const probe = standProbe();
  probe.core.position_percent = exact(2);
  probe.core.jointGap_um = exact(100);
  const { codesPerAmpere } = nominalTransfer(probe);
  expect(codesPerAmpere / (1.02 * (MU0 / (2.1e-3 + 80e-3 / 2200)) * 50 * 1.5 * 4096 / 5)).toBeCloseTo(1, 12);
  probe.core.play = {
    coercivity_A_per_m: exact(15), remanence_T: exact(0.2), saturation_T: exact(0.45), loopFile: '',
  };
  // the permeability of the file is that of small signals
  expect(nominalTransfer(probe).codesPerAmpere).toBe(codesPerAmpere);
});

test('errors of the converter: offset, gain, reference over temperature, and the bow at the rest code', () => {
  const probe = standProbe();
  probe.converter.offset_codes = exact(5);
  probe.converter.gainError_percent = exact(1);
  probe.converter.referenceDrift_ppm_per_K = exact(100);
  const plain = nominalTransfer(standProbe());
  expect(nominalTransfer(probe).restCode).toBeCloseTo(2048 * 1.01 + 5, 9);
  expect(nominalTransfer(probe).codesPerAmpere / plain.codesPerAmpere).toBeCloseTo(1.01, 12);
  // 60 K * 100 ppm/K more volts for a code
  expect(nominalGain(probe, 85)).toBeCloseTo(1 / 1.006, 12);
  expect(nominalOffsetCodes(probe, 85)).toBeCloseTo(2048 * 1.01 * (1 / 1.006 - 1), 9);

  const bowed = standProbe();
  bowed.converter.inl_codes = exact(8);
  bowed.sensor.rest_V = exact(0.5);
  bowed.amplifier.gain = exact(1);
  bowed.amplifier.virtualGround_V = exact(0);
  const { restCode, codesPerVolt } = nominalTransfer(bowed);
  // 409.6 codes; q = 409.1/4094, bow = 8 * 4 q (1 - q) and its slope 8 * 4 (1 - 2 q)/4094
  const q = 409.1 / 4094;
  expect(restCode).toBeCloseTo(409.6 + 32 * q * (1 - q), 9);
  expect(codesPerVolt / (4096 / 5)).toBeCloseTo(1 + (32 * (1 - 2 * q)) / 4094, 12);
});

test('drift of the amplifier', () => {
  const probe = standProbe();
  probe.amplifier.offsetDrift_uV_per_K = exact(-20);
  // 1.5 * -20 uV/K * 60 K * 4096/5 V
  expect(nominalOffsetCodes(probe, 85)).toBeCloseTo(-1.47456, 9);
});

describe('behind a switched bias', () => {
  test('the rest drift is gone; reversal leaves the plate offset with the drift of the sensitivity', () => {
    const probe = standProbe();
    probe.sensor.restDrift_mV_per_K = exact(0.2);
    probe.sensor.sensitivityDrift_ppm_per_K = exact(300);
    probe.sensor.plateOffset_mT = exact(2);
    probe.sensor.bias = 'reversal';
    // 2 mT * 50 mV/mT * 1.5 * 4096/5 V = 122.88 codes
    expect(nominalTransfer(probe).plateCodes).toBeCloseTo(122.88, 9);
    expect(nominalOffsetCodes(probe, 85)).toBeCloseTo(122.88 * 0.018, 9);
  });

  test('a quarter turn leaves nothing', () => {
    const probe = standProbe();
    probe.sensor.restDrift_mV_per_K = exact(0.2);
    probe.sensor.plateOffset_mT = exact(2);
    probe.sensor.bias = 'quarter turn';
    expect(nominalTransfer(probe).plateCodes).toBe(0);
    expect(nominalOffsetCodes(probe, 85)).toBe(0);
  });
});

describe('trade facts (common practice, no source)', () => {
  /** A slotted core that gives 100 mV per ampere on a 5 V sensor resting at 2.472 V. */
  function slottedCore() {
    const probe = standProbe();
    probe.sensor.rest_V = exact(2.472);
    const teslaPerAmpere = nominalTransfer(probe).fieldTeslaPerAmpere;
    probe.sensor.sensitivity_mV_per_mT = exact(0.1 / teslaPerAmpere);
    probe.amplifier.gain = exact(1);
    return probe;
  }

  test('100 mV per ampere at 12 bits of 5 V are 81.92 codes per ampere', () => {
    const transfer = nominalTransfer(slottedCore());
    expect(transfer.sensorVoltsPerAmpere).toBeCloseTo(0.1, 12);
    expect(transfer.codesPerAmpere).toBeCloseTo(81.92, 9);
  });

  test('a sensor on 5 V resting at 2.472 V shows code 2025, not half scale', () => {
    expect(Math.round(nominalTransfer(slottedCore()).restCode)).toBe(2025);
  });

  test('1, 2 and 3 A read 2.572, 2.672 and 2.772 V', () => {
    const { sensorRestVolts, sensorVoltsPerAmpere } = nominalTransfer(slottedCore());
    [1, 2, 3].forEach((amperes) => {
      expect(sensorRestVolts + amperes * sensorVoltsPerAmpere).toBeCloseTo(2.472 + 0.1 * amperes, 12);
    });
  });
});
