/** The longest time that a field may hold: an hour. */
export const MAX_TIME_MS = 3_600_000;
