/** The fields of one shape of current. */
import type { CurrentSpec } from '../probe/fields.ts';

export type ShapeSpec<K extends CurrentSpec['shape']> = Extract<CurrentSpec, { shape: K }>;

/** Relative room for rounding where a length is compared with one computed from a frequency. */
export const ROUNDING = 1e-9;
