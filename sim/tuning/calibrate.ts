/**
 * What the factory does with a unit: three steady currents (zero, plus and minus span) at one temperature, the mean of
 * many codes at each, zero and gain from them. The unit is measured through its own noise and quantisation like on a
 * bench; its drawn truth is not looked at.
 */
import { Block, Demodulate, Intake, SETTLING, type Stage } from '../../lib/index.ts';
import { Bench, newCodeBlock } from '../hardware/bench.ts';
import type { Probe, Scenario, StageSpecOf } from '../probe/fields.ts';
import { ProbeError } from '../probe/problem.ts';
import { tuneStage } from './stages.ts';
import { nominalMeasured, type Measured } from './unit.ts';

const BLOCK = 256;
/** Time ahead of the codes that count, for the analog side and the phases of a switched bias. */
const SETTLE_SAMPLES = 1024;

export function calibrate(probe: Probe, options: { seed: number; trial: number; folder: string }): Measured {
  const { calibration } = probe;
  if (calibration === null) return nominalMeasured(probe);
  const { at_C, span_A, samples } = calibration;
  const [zeroCode, high, low] = [0, span_A, -span_A].map((amperes) => meanCode(probe, amperes, at_C, samples, options));
  return { celsius: at_C, zeroCode, codesPerAmpere: (high - low) / (2 * span_A) };
}

function meanCode(
  probe: Probe, amperes: number, celsius: number, samples: number, options: { seed: number; trial: number; folder: string },
): number {
  const scenario: Scenario = {
    name: `calibration at ${amperes} A`, about: '', current: { shape: 'dc', level_A: amperes },
    duration_ms: (samples + SETTLE_SAMPLES) / probe.converter.rate_kHz, judgeFrom_ms: 0, settle_ms: 0, temperature_C: celsius,
    ambient: [], supply_V: null, supplySag_mV_per_s: 0, outerField_uT: 0, neighbour_A: 0, coil: null, events: [], long: false,
  };
  const bench = new Bench(probe, scenario, options);
  const stages = decoders(probe);
  const codes = newCodeBlock(BLOCK);
  const block = new Block(BLOCK);
  let sum = 0;
  let count = 0;
  let position = 0;
  let clipped = false;
  while (bench.next(codes)) {
    block.count = codes.count;
    for (let i = 0; i < codes.count; i++) {
      block.value[i] = codes.code[i];
      block.status[i] = codes.events[i];
      clipped ||= codes.clipped[i] !== 0;
    }
    for (const stage of stages) stage.process(block);
    for (let i = 0; i < block.count; i++, position++) {
      if (position < SETTLE_SAMPLES || block.status[i] & SETTLING) continue;
      sum += block.value[i];
      count++;
    }
  }
  bench.close();
  if (clipped) {
    const allowed = 'currents at which neither sensor, amplifier nor converter clips';
    throw new ProbeError([{ path: 'calibration.span_A', found: `clipping at ${amperes} A`, allowed, hint: 'calibrate with a smaller span' }]);
  }
  return sum / count;
}

/** Codes as numbers, demodulated when the bias is switched; no guard bits, mid code 0, no direction. */
function decoders(probe: Probe): Stage[] {
  const unit = {
    version: 1, sign: 1, factoryZero: 0, gainQ24: 0, offsetTemperatures: [], offsets: [], gainTemperatures: [], gainsQ24: [], crc: 0,
  };
  const place = {
    probe, index: 0, rateHz: probe.converter.rate_kHz * 1e3, countsPerAmpere: 1, countsPerCode: 1, limit: 0, roof: 0, problems: [],
  };
  const intake = tuneStage({ stage: 'intake', midCode: 0, guardBits: 0 }, place, 0);
  const stages: Stage[] = [];
  if (intake?.kind === 'intake') stages.push(new Intake(intake, unit));
  const demodulate = probe.chain.find((spec): spec is StageSpecOf<'demodulate'> => spec.stage === 'demodulate');
  const constants = demodulate === undefined ? null : tuneStage(demodulate, place, 0);
  if (constants?.kind === 'demodulate') stages.push(new Demodulate(constants, unit));
  return stages;
}
