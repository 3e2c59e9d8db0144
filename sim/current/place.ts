/**
 * The place of a time on the grid, in steps. A place within 1e-6 of a step of a grid point is put on it: a boundary
 * that falls on the grid must not move by a point because 1 / rate was rounded.
 */
const ON_THE_GRID = 1e-6;

export function gridPlace(seconds: number, stepSeconds: number): number {
  const place = seconds / stepSeconds;
  const whole = Math.round(place);
  return Math.abs(place - whole) <= ON_THE_GRID ? whole : place;
}
