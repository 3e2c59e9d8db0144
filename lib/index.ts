/**
 * The portable chain: integers only, nothing outside this folder. Everything that decides a reading is in
 * ChainConstants; a Chain made from them works through Blocks in place.
 */
export * from './arithmetic.ts';
export * from './average.ts';
export * from './block.ts';
export * from './chain.ts';
export * from './constants.ts';
export * from './custom.ts';
export * from './decimate.ts';
export * from './demodulate.ts';
export * from './despike.ts';
export * from './flow.ts';
export * from './intake.ts';
export * from './linearise.ts';
export * from './linger.ts';
export * from './meter.ts';
export * from './overrange.ts';
export * from './problems.ts';
export * from './scale.ts';
export * from './sections.ts';
export * from './stage.ts';
export * from './status.ts';
export * from './table.ts';
export * from './thermometer.ts';
export * from './trim.ts';
export * from './twoword.ts';
export * from './unit.ts';
export * from './zero.ts';
