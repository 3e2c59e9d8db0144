/**
 * The laptop side: probe files, currents, hardware, tuning, judging. What the command line does can be done from here.
 */
export { loadProbe, type LoadedProbe } from './probe/load.ts';
export { validate } from './probe/validate.ts';
export { probeSchema } from './probe/schema.ts';
export { fieldTable } from './probe/table.ts';
export { ProbeError, type Problem } from './probe/problem.ts';
export type { Probe, Requirement, Scenario, StageSpec } from './probe/fields.ts';
export { openCurrent, type CurrentSource } from './current/source.ts';
export { Bench, newCodeBlock, type CodeBlock } from './hardware/bench.ts';
export { nominalTransfer } from './hardware/transfer.ts';
export { calibrate } from './tuning/calibrate.ts';
export { tune, type Tuned } from './tuning/tune.ts';
export { play, type Observer, type Played, type Readings, type Record as MeterReading } from './judging/play.ts';
export { prove, type ProveOptions, type Row, type Summary, type Verdict } from './judging/prove.ts';
export { RecordedPlayer } from './judging/recorded.ts';
export { CAUTIONS } from './report/caution.ts';
export { statusWords } from './report/status.ts';
export { DOOR_STAND } from './demo/doorstand.ts';
