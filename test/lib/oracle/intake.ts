/** Intake by the bits of the word: the code is the named bits, read as an unsigned or a two's complement number. */
import type { IntakeConstants } from '../../../lib/index.ts';
import type { Oracle } from './record.ts';

export const intakeOracle: Oracle<IntakeConstants> = (constants, unit, input) => {
  const { bits, signed, justifyShift, midCode, guardBits } = constants;
  return input.map((sample) => {
    // the word from its highest bit to its lowest, as text
    const word = BigInt.asUintN(32, sample.value).toString(2).padStart(32, '0');
    const raw = BigInt(`0b${word.slice(32 - justifyShift - bits, 32 - justifyShift)}`);
    const code = signed === 1 ? BigInt.asIntN(bits, raw) : raw;
    return { ...sample, value: BigInt(unit.sign) * (code - BigInt(midCode)) * 2n ** BigInt(guardBits) };
  });
};
