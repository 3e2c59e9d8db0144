import type { IntakeConstants } from '../../../lib/index.ts';
import type { Oracle } from './record.ts';
export const intakeOracle: Oracle<IntakeConstants> = (c, unit, input) => input.map((s) => {
  const code = (s.value >> BigInt(c.justifyShift));
  const v = c.signed ? BigInt.asIntN(c.bits, code) : BigInt.asUintN(c.bits, code);
  return { ...s, value: BigInt(unit.sign) * (v - BigInt(c.midCode)) * 2n ** BigInt(c.guardBits) };
});
