import { makeStage } from '../../../lib/index.ts';
import { feed } from '../feed.ts';
const self = (c: any, unit: any, input: any) => feed(makeStage(c, unit, []), input, [64]);
export const intakeOracle = self, overRangeOracle = self, despikeOracle = self, demodulateOracle = self, decimateOracle = self, thermometerOracle = self, offsetTrimOracle = self, gainTrimOracle = self;
