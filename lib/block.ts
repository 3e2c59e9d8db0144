/**
 * A block of samples that every stage works through in place. The caller fills `value` with raw code words, `status`
 * with event levels, sets `count` and `temperatureCode` (one for the block: cut where it changes), and hands it to the
 * chain. `temperature` (1/256 °C) is written by the thermometer stage, `zero` (counts) by the zero stage; both travel
 * with the samples. A decimating stage shrinks `count`.
 */
export class Block {
  value: Int32Array;
  status: Int32Array;
  temperature: Int32Array;
  zero: Int32Array;
  capacity: number;
  count: number;
  temperatureCode: number;

  constructor(capacity: number) {
    this.value = new Int32Array(capacity);
    this.status = new Int32Array(capacity);
    this.temperature = new Int32Array(capacity);
    this.zero = new Int32Array(capacity);
    this.capacity = capacity;
    this.count = 0;
    this.temperatureCode = 0;
  }
}
