/**
 * What an embedded ES5 engine with typed arrays offers, and all that this folder may use. It stands in for the
 * compiler's own library when the folder is compiled on its own, so that anything newer is an error.
 */
interface Array<T> {
  length: number;
  [index: number]: T;
  push(item: T): number;
  join(separator: string): string;
}
interface ReadonlyArray<T> {
  readonly length: number;
  readonly [index: number]: T;
  join(separator: string): string;
}
interface String {
  readonly length: number;
}
interface Boolean {}
interface Number {}
interface Function {}
interface CallableFunction extends Function {}
interface NewableFunction extends Function {}
interface IArguments {}
interface Object {}
interface RegExp {}

interface Int32Array {
  readonly length: number;
  [index: number]: number;
}
declare var Int32Array: { new (length: number): Int32Array };
interface Float64Array {
  readonly length: number;
  [index: number]: number;
}
declare var Float64Array: { new (length: number): Float64Array };

interface Error {
  name: string;
  message: string;
}
declare var RangeError: { new (message: string): Error };
declare var TypeError: { new (message: string): Error };

declare var Math: {
  floor(value: number): number;
};
