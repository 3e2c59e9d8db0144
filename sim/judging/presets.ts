/**
 * What a probe file left to its defaults, the weightiest first. For a number of the hardware the weight is known: how
 * far the nominal reading at full range moves when the part is 10 % away from the default that was assumed. Defaults of
 * zero (a part taken as ideal) come next, then the rest. What tuning derives by itself (null) is not listed.
 */
import { nominalTransfer } from '../hardware/transfer.ts';
import type { Probe } from '../probe/fields.ts';
import type { Preset } from '../probe/validate.ts';

export interface WeighedPreset extends Preset {
  /** null: not known. */
  amperesForTenPercent: number | null;
}

const HARDWARE = ['core', 'sensor', 'amplifier', 'converter', 'supply_V'] as const;

export function weighPresets(probe: Probe, presets: readonly Preset[]): WeighedPreset[] {
  return presets
    .filter(({ path, value }) => value !== null && value !== '' && !path.startsWith('requirements'))
    .map((preset) => ({ ...preset, amperesForTenPercent: weightOf(probe, preset) }))
    .sort((one, other) => rank(other) - rank(one));
}

function rank({ path, value, amperesForTenPercent }: WeighedPreset): number {
  if (amperesForTenPercent !== null && amperesForTenPercent > 0) return 2 + amperesForTenPercent;
  if (isHardware(path)) return value === 0 ? 2 : 1;
  return 0;
}

function isHardware(path: string): boolean {
  return HARDWARE.some((part) => path === part || path.startsWith(`${part}.`));
}

function weightOf(probe: Probe, { path, value }: Preset): number | null {
  if (typeof value !== 'number' || value === 0 || !isHardware(path)) return null;
  const before = nominalTransfer(probe);
  const after = nominalTransfer(withValue(probe, path, value * 1.1));
  const codes = (after.codesPerAmpere - before.codesPerAmpere) * probe.range_A + after.restCode - before.restCode;
  const amperes = Math.abs(codes / before.codesPerAmpere);
  return Number.isFinite(amperes) ? amperes : null;
}

/** The probe with one value of its hardware replaced. */
function withValue(probe: Probe, path: string, value: number): Probe {
  const [part, field] = path.split('.');
  const old = field === undefined ? probe[part as 'supply_V'] : (probe[part as 'core'] as { [name: string]: unknown })[field];
  const fresh = typeof old === 'object' && old !== null ? { ...old, nominal: value } : value;
  return { ...probe, [part]: field === undefined ? fresh : { ...(probe[part as 'core'] as object), [field]: fresh } };
}
