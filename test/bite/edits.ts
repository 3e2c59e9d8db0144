/**
 * One-line edits to lib/, each of which breaks a law; the tests must notice every one. `find` must stand exactly once
 * in the file. Common slips of integer filter code: rounding, clamps, first samples, counts, order, status.
 */
export interface Edit {
  file: string;
  find: string;
  put: string;
}

const edit = (file: string, find: string, put: string): Edit => ({ file: `${file}.ts`, find, put });

export const EDITS: readonly Edit[] = [
  edit('arithmetic', 'return Math.floor((value + HALF[bits]) * INVERSE[bits]);', 'return Math.floor(value * INVERSE[bits]);'),
  edit('arithmetic', 'return Math.floor((value + HALF[bits]) * INVERSE[bits]);', 'return Math.floor((value + HALF[bits] - 1) * INVERSE[bits]);'),
  edit('arithmetic', 'return Math.floor(value * INVERSE[bits]);', 'return (value * INVERSE[bits]) | 0;'),
  edit('arithmetic', 'return 2 * (value - quotient * divisor) >= divisor ? quotient + 1 : quotient;', 'return 2 * (value - quotient * divisor) > divisor ? quotient + 1 : quotient;'),
  edit('arithmetic', 'return value < low ? low : value > high ? high : value;', 'return value < low ? low : value;'),
  edit('arithmetic', 'return (a - b) | 0;', 'return a - b;'),

  edit('intake', 'if (signed === 1 && code >= half)', 'if (signed === 1 && code > half)'),
  edit('intake', 'lowBits(shiftFloor(value[i], justifyShift), bits)', 'lowBits(value[i], bits)'),
  edit('intake', 'multiply(sign, shiftLeft(subtract(code, midCode), guardBits))', 'shiftLeft(subtract(code, midCode), guardBits)'),
  edit('intake', 'shiftLeft(subtract(code, midCode), guardBits)', 'subtract(shiftLeft(code, guardBits), midCode)'),

  edit('overrange', 'const high = x >= highLimit;', 'const high = x > highLimit;'),
  edit('overrange', 'const low = x <= lowLimit;', 'const low = x < lowLimit;'),
  edit('overrange', 'magnitude(x) > magnitudeLimit', 'magnitude(x) >= magnitudeLimit'),
  edit('overrange', 'holdLeft = holdSamples;', 'holdLeft = holdSamples + 1;'),
  edit('overrange', 'const x = multiply(sign, value[i]);', 'const x = value[i];'),
  edit('overrange', 'if (bits & EVENT_CLEAR) latched = 0;', 'latched = bits & EVENT_CLEAR ? 0 : 0;'),
  edit('overrange', 'if (high || low) sameCount = 0;', 'if (high) sameCount = 0;'),

  edit('linger', 'overRangeLeft = s & OVER_RANGE ? memory + 1 : overRangeLeft;', 'overRangeLeft = s & OVER_RANGE ? memory : overRangeLeft;'),
  edit('linger', 'settlingLeft = s & SETTLING ? memory + 1 : settlingLeft;', 'settlingLeft = s & SETTLING ? 1 : settlingLeft;'),
  edit('linger', 'state[first + 1] = railedLeft;', 'state[first + 1] = 0;'),
  edit('linger', 'if ((s & LINGERING) === 0 && left === 0) continue;', 'if (s === 0 && left < 2) continue;'),

  edit('despike', 'const high = a < b ? b : a;', 'const high = b;'),
  edit('despike', 'const middle2 = highAB < highCD ? highAB : highCD;', 'const middle2 = highAB;'),
  edit('despike', 'if (seen < window) status[i] |= SETTLING;', 'if (seen <= window) status[i] |= SETTLING;'),
  edit('despike', 'linger(block, state, LINGER_AT, window - 1);', 'linger(block, state, LINGER_AT, window);'),
  edit('despike', 'x4 = x3;', 'x4 = x2;'),

  edit('demodulate', 'if (age <= longest) age++;', 'if (age < longest) age++;'),
  edit('demodulate', '} else if (age > blank) {', '} else if (age >= blank) {'),
  edit('demodulate', 'subtract(kept, add(state[MEAN + 1], state[MEAN + 3]))', 'subtract(kept, add(state[MEAN + 1], state[MEAN + 2]))'),
  edit('demodulate', 'state[5] = shiftRound(subtract(state[MEAN], state[MEAN + 1]), 1);', 'state[5] = subtract(state[MEAN], state[MEAN + 1]);'),
  edit('demodulate', 'bits |= s & LINGERING;', 'bits = s & LINGERING;'),

  edit('decimate', 'if (phase < ratio) continue;', 'if (phase < ratio - 1) continue;'),
  edit('decimate', 'sum = addWrapping(sum, value[i]);', 'sum = value[i] + sum > 2147483647 ? 2147483647 : addWrapping(sum, value[i]);'),
  edit('decimate', 'add(divideRound(value[i], gain), reference)', 'divideRound(value[i], gain)'),
  edit('decimate', '(pending & ~LINGERING) | (status[i] & LINGERING)', '(pending & ~LINGERING) | (pending & LINGERING)'),
  edit('decimate', 'const memory = this.constants.order * (ratio - 1) + 1;', 'const memory = this.constants.order * ratio;'),
  edit('decimate', 'this.state[3] = pending;', 'this.state[3] = 0;'),
  edit('decimate', 'this.state[COMB + n] = before;', 'this.state[COMB + n] = value[0];'),

  edit('thermometer', 'const broken = code < constants.lowCode || code > constants.highCode;', 'const broken = code <= constants.lowCode || code > constants.highCode;'),
  edit('thermometer', 'if (holdLeft > 0) holdLeft--;', 'if (holdLeft > 1) holdLeft--;'),
  edit('thermometer', 'smooth = shiftLeft(target, shift);', 'smooth = target;'),
  edit('thermometer', 'let holdLeft = state[1] === 1 ? state[3] : 0;', 'let holdLeft = constants.holdSamples;'),
  edit('table', 'if (x >= xs[last]) return ys[last];', 'if (x > xs[last]) return ys[last];'),
  edit('table', 'divideRound(rise, subtract(xs[i + 1], xs[i]))', 'Math.floor(rise / subtract(xs[i + 1], xs[i]))'),

  edit('trim', 'const y = subtract(value[i], offset);', 'const y = subtract(offset, value[i]);'),
  edit('trim', 'offset = interpolate(unit.offsetTemperatures, unit.offsets, now);', 'offset = interpolate(unit.offsetTemperatures, unit.offsets, temperature[0]);'),
  edit('trim', 'const y = shiftRound(multiply(value[i], gainQ24), 24);', 'const y = Math.floor(multiply(value[i], gainQ24) / 16777216);'),
  edit('trim', 'gainQ24 = shiftRound(multiply(unit.gainQ24, interpolate(unit.gainTemperatures, unit.gainsQ24, now)), 24);', 'gainQ24 = interpolate(unit.gainTemperatures, unit.gainsQ24, now);'),
  edit('trim', "if (flow.zeroed) problems.add('order', 'behind zero', 'ahead of zero', 'the zero has already removed this offset');", ''),
  edit('trim', 'state[2] = offset;', 'state[2] = 0;'),
  edit('trim', 'state[2] = gainQ24;', 'state[2] = 0;'),
  edit('trim', "problems.width('|x| * gain', flow.limit * gainQ24 + 8388608, 'use fewer guard bits');", ''),
  edit('unit', 'crc ^= (words[i] >> (8 * byte)) & 255;', 'crc ^= (words[i] >> (8 * (3 - byte))) & 255;'),
  edit('unit', 'if (unitCrc(unit) !== unit.crc) throw', 'if (unitCrc(unit) === 0) throw'),

  edit('zero', 'state[0] = this.factoryZero;', 'state[0] = 0;'),
  edit('zero', 'if (magnitude(moved) <= this.constants.authority) state[3] = moved;', 'state[3] = moved;'),
  edit('zero', 'const near = magnitude(subtract(x, this.factoryZero)) <= this.constants.trackWindow;', 'const near = magnitude(subtract(x, state[0])) <= this.constants.trackWindow;'),
  edit('zero', 'if (state[13] === 0 && buttonMode === 1)', 'if (buttonMode === 1)'),
  edit('zero', '(state[6] === 1 && state[2] === 1)', 'state[2] === 1'),
  edit('zero', "'taken', 'takenTemperature', 'suspect'];", "'taken', 'takenTemperature'];"),
  edit('zero', '> this.constants.spanLimit ||', '>= this.constants.spanLimit ||'),
  edit('zero', 'if (bits & EVENT_DEGAUSSED) state[2] = 0;', ''),

  edit('linearise', 'if (segment >= 0 && segment < last) {', 'if (segment >= 0 && segment < last - 1) {'),
  edit('linearise', 'y = segment < 0 ? knots[0] : knots[last];', 'y = segment < 0 ? knots[last] : knots[0];'),
  edit('linearise', 'multiply(subtract(knots[segment + 1], knots[segment]), rest), gridBits));', 'multiply(subtract(knots[segment + 1], knots[segment]), rest), gridBits - 1));'),
  edit('linearise', 'const past = subtract(distance, shiftLeft(last, gridBits));', 'const past = distance;'),

  edit('sections', 'const k2 = c.feedback === 2 ? -1 : 0;', 'const k2 = 0;'),
  edit('sections', 'const a2 = -c.a2;', 'const a2 = c.a2;'),
  edit('sections', "y1 = y;", 'y1 = rounded;'),
  edit('sections', 'if (y !== rounded) {', 'if (rounded > limit) {'),
  edit('sections', 'this.state[at + 3] = held;', 'this.state[at + 3] = 0;'),
  edit('sections', 'e2 = e1;', 'e2 = 0;'),

  edit('average', 'position = position + 1 === length ? 0 : position + 1;', 'position = position === length ? 0 : position + 1;'),
  edit('average', 'value[i] = divideRound(sum, length);', 'value[i] = Math.floor(sum / length);'),
  edit('average', 'linger(block, state, LINGER_AT, length - 1);', 'linger(block, state, LINGER_AT, length);'),
  edit('average', 'this.state[0] = multiply(first, length);', 'this.state[0] = 0;'),

  edit('scale', 'const y = shiftRound(multiply(value[i], gain), shift);', 'const y = multiply(shiftRound(value[i], shift), gain);'),
  edit('scale', 'if (held !== y) status[i] |= CLAMPED;', 'if (held < y) status[i] |= CLAMPED;'),
  edit('scale', 'const held = clamp(y, -limit, limit);', 'const held = clamp(y, -limit - 1, limit);'),
  edit('scale', 'value[i] = held;', 'value[i] = y;'),

  edit('meter', 'if (multiply(subtract(x, hysteresis), count) < sum) return false;', 'if (multiply(subtract(x, hysteresis), count) <= sum) return false;'),
  edit('meter', 'if (state[0] === windowSamples) {', 'if (state[0] > windowSamples) {'),
  edit('meter', 'if (multiply(count, rest) < multiply(r, r)) subtractNumber(words, 1);', ''),
  edit('meter', 'state[6] = status;', ''),
  edit('meter', 'state[8] = skipped;', ''),
  edit('meter', 'records[at + 2] = divideRound(sum, count);', 'records[at + 2] = Math.floor(sum / count);'),
  edit('twoword', 'const cross = multiply(2 * upper, lower);', 'const cross = multiply(upper, lower);'),
  edit('twoword', 'scratch[1] <= words[1]', 'scratch[1] < words[1]'),

  edit('stage', 'state.length; i++) table.push(stage.state[i] + 0);', 'state.length - 1; i++) table.push(stage.state[i] + 0);'),
  edit('stage', 'for (let i = 0; i < stage.ring.length; i++) stage.ring[i] = 0;', ''),
  edit('flow', "problems.add('output', limit, 'at most 2147483647', remedy);", ''),
  edit('problems', 'if (reach < 9007199254740992) return true;', 'if (reach < 18014398509481984) return true;'),
  edit('custom', '&& makers[i].version === constants.version', ''),
  edit('custom', "if (c.name.length === 0) problems.add('name', c.name, 'a name', 'name the stage');", ''),
  edit('custom', "flow.give(problems, c.limit, 'lower the limit');", ''),
  edit('custom', 'return makers[i].make(constants.words, unit);', 'return makers[0].make(constants.words, unit);'),
  edit('chain', 'for (let i = 0; i < this.stages.length; i++) powerCycle(this.stages[i]);', 'for (let i = 1; i < this.stages.length - 2; i++) powerCycle(this.stages[i]);'),
];
