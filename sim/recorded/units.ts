/**
 * Units as headings of recorded files write them. The micro sign has two code points (U+00B5 and the Greek letter
 * U+03BC) and a stand-in, u; all become U+00B5. Scaling divides by a power of ten instead of multiplying by a negative
 * one: 1234 mA / 1000 is then the very number that 1.234 A is.
 */

/** Power of ten of a unit of time, of a unit of current. */
export const SECONDS_POWER: Readonly<Record<string, number>> = { s: 0, ms: -3, 'µs': -6, ns: -9 };
export const AMPERES_POWER: Readonly<Record<string, number>> = { A: 0, mA: -3, 'µA': -6, kA: 3 };

/** Units that stand in headings without brackets too; a wrong one must be recognised to be refused. */
const WELL_KNOWN = new Set([
  ...Object.keys(SECONDS_POWER), ...Object.keys(AMPERES_POWER), 'ps', 'min', 'h', 'nA', 'V', 'mV', 'µV', 'kV', 'T',
  'mT', 'µT', 'Hz', 'kHz', 'MHz', '°C', 'K', '%', 'Ω', 'W', 'codes', 'counts',
]);
const MICRO = /^(?:\u03bc|u(?=[sAVT]$))/;
const BRACKETED = /^(.*?)\s*(?:\(([^()]*)\)|\[([^[\]]*)\])$/;
const OVER_UNIT = /^(.*\S)\s*\/\s*(\S+)$/; // quantity over unit, "t/ms", as ISO 80000-1 has it
const UNIT_LIKE = /^[^\s\d]{1,8}$/; // brackets may hold other things: "I (probe 1)"

export function plainUnit(text: string): string {
  return text.trim().replace(MICRO, '\u00b5');
}

/** Name and unit of a heading such as `Time [ms]`, `I (A)` or `t/µs`. */
export function nameAndUnit(heading: string): { name: string; unit: string | null } {
  const bracketed = BRACKETED.exec(heading);
  const unit = plainUnit(bracketed?.[2] ?? bracketed?.[3] ?? '');
  if (bracketed !== null && UNIT_LIKE.test(unit)) return { name: bracketed[1], unit };
  const over = OVER_UNIT.exec(heading);
  if (over !== null && WELL_KNOWN.has(plainUnit(over[2]))) return { name: over[1], unit: plainUnit(over[2]) };
  return { name: heading, unit: null };
}

/** The unit in a cell that holds nothing else, bracketed or well known; null when the cell is something else. */
export function loneUnit(cell: string): string | null {
  const { name, unit } = nameAndUnit(cell);
  if (name === '' && unit !== null) return unit;
  return WELL_KNOWN.has(plainUnit(cell)) ? plainUnit(cell) : null;
}

export function scaled(value: number, powerOfTen: number): number {
  return powerOfTen < 0 ? value / 10 ** -powerOfTen : value * 10 ** powerOfTen;
}
