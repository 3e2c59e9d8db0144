/**
 * A recorded current from a CSV file: times may be uneven but must rise; between two rows the current is the straight
 * line through them. The first row stands at t = 0. Rows are read as the grid reaches them, so memory does not grow
 * with the file, and its end is known when the last row has been read; a point behind the last row is an error,
 * because any value there would be made up.
 */
import { resolve } from 'node:path';
import { columnUnit, CsvError, CsvReader, findColumn } from '../recorded/csv.ts';
import { AMPERES_POWER, scaled, SECONDS_POWER } from '../recorded/units.ts';
import { NoSwing } from './noswing.ts';
import type { ShapeSpec } from './shape.ts';

/** Steps by which a point may stand behind the last row and still belong to it: both were rounded. */
const ON_THE_LAST_ROW = 1e-6;

/** As for every other current. SCPI-99, volume 1, 7.2.1: 9.9E37 stands for infinity, 9.91E37 for not a number. */
const MOST_AMPERES = 1e6;

export class RecordedCurrent extends NoSwing {
  override endSeconds: number | null = null;
  private readonly reader: CsvReader;
  private readonly row: Float64Array;
  private readonly stepSeconds: number;
  private readonly timeColumn: number;
  private readonly currentColumn: number;
  private readonly timePower: number;
  private readonly currentPower: number;
  private readonly firstTime: number;
  private point = 0;
  // the line between two rows, times in grid steps; timeB as the file has it
  private timeB: number;
  private stepsA: number;
  private stepsB: number;
  private amperesA: number;
  private amperesB: number;

  constructor(spec: ShapeSpec<'file'>, stepSeconds: number, folder: string) {
    super();
    this.stepSeconds = stepSeconds;
    this.reader = new CsvReader(resolve(folder, spec.path), spec.path);
    try {
      const { reader } = this;
      this.timeColumn = findColumn(reader, spec.timeColumn, 0, 'time');
      this.currentColumn = findColumn(reader, spec.currentColumn, 1, 'current');
      this.refuseSameColumn();
      this.timePower = powerOf(reader, this.timeColumn, SECONDS_POWER, spec.timeUnit);
      this.currentPower = powerOf(reader, this.currentColumn, AMPERES_POWER, spec.currentUnit);
      for (let i = 0; i < reader.columns; i++) {
        if (i !== this.timeColumn && i !== this.currentColumn) reader.demand(i, 'anything');
      }
      this.row = new Float64Array(reader.columns);
      reader.next(this.row); // there is one, or the reader had not opened
      this.firstTime = this.timeB = this.row[this.timeColumn];
      this.stepsA = this.stepsB = 0;
      this.amperesA = this.amperesB = this.amperesInRow();
      if (!this.advance()) {
        throw new CsvError('only one row; a current needs at least two', reader.file, reader.line);
      }
    } catch (error) {
      this.reader.close();
      throw error;
    }
  }

  next(amperes: Float64Array, count: number): void {
    const { point } = this;
    for (let i = 0; i < count;) {
      while (point + i > this.stepsB && this.advance());
      const { stepsA, stepsB, amperesA, amperesB } = this;
      const rise = amperesB - amperesA;
      const length = stepsB - stepsA;
      if (point + i > stepsB) this.refuseBeyondEnd(point + i);
      // every point up to the later row lies on the same line
      do {
        const share = (point + i - stepsA) / length;
        amperes[i] = share < 1 ? amperesA + rise * share : amperesB;
        i++;
      } while (i < count && point + i <= stepsB);
    }
    this.point = point + count;
  }

  override close(): void {
    this.reader.close();
  }

  /** Goes on to the next row; false at the end of the record. */
  private advance(): boolean {
    const { reader, row } = this;
    if (this.endSeconds !== null) return false;
    if (!reader.next(row)) {
      this.endSeconds = this.secondsOf(this.timeB);
      return false;
    }
    const time = row[this.timeColumn];
    if (!(time > this.timeB)) {
      throw new CsvError(`${time} is not later than ${this.timeB} in the row before; times must rise`,
        reader.file, reader.line, reader.columnName(this.timeColumn));
    }
    this.stepsA = this.stepsB;
    this.amperesA = this.amperesB;
    this.timeB = time;
    this.stepsB = this.secondsOf(time) / this.stepSeconds;
    this.amperesB = this.amperesInRow();
    return true;
  }

  private secondsOf(time: number): number {
    return scaled(time - this.firstTime, this.timePower);
  }

  private amperesInRow(): number {
    const amperes = scaled(this.row[this.currentColumn], this.currentPower);
    if (Math.abs(amperes) <= MOST_AMPERES) return amperes;
    const { reader } = this;
    throw new CsvError(`${amperes} A, allowed ${-MOST_AMPERES} to ${MOST_AMPERES} A; instruments write huge numbers ` +
      'for over-range or a missing value', reader.file, reader.line, reader.columnName(this.currentColumn));
  }

  private refuseBeyondEnd(n: number): void {
    if (n <= this.stepsB + ON_THE_LAST_ROW) return;
    throw new CsvError(`the record lasts ${this.endSeconds} s from its first row, and the current at ` +
      `${n * this.stepSeconds} s was asked for; a scenario may not outlast its record`,
      this.reader.file, this.reader.line);
  }

  private refuseSameColumn(): void {
    if (this.timeColumn !== this.currentColumn) return;
    throw new CsvError('stands for both time and current; name two columns', this.reader.file, null,
      this.reader.columnName(this.timeColumn));
  }
}

/** Power of ten of the unit that the file names for a column, or of the one the scenario gives. */
function powerOf(
  reader: CsvReader, column: number, powers: Readonly<Record<string, number>>, otherwise: string,
): number {
  const unit = columnUnit(reader, column) ?? otherwise;
  if (Object.hasOwn(powers, unit)) return powers[unit];
  throw new CsvError(`unit "${unit}", allowed ${Object.keys(powers).join(', ')}`, reader.file, null,
    reader.columnName(column));
}
