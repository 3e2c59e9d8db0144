/**
 * The bits of a sample's status. The low bits are what the chain says about the sample; the high bits are event
 * levels that come in with the codes and travel with the samples. Combining samples ORs their status.
 */
export const OVER_RANGE = 1; // the sensor was beyond its limits, or the analog side is still recovering
export const RAILED = 2; // the A/D converter stood at its end codes
export const CLAMPED = 4; // a stage had to clamp a result
export const STUCK = 8; // codes do not move although noise must move them, or a switched bias does not switch
export const SETTLING = 16; // a filter is filling, a zero is being taken: not yet valid
export const THERMOMETER_BROKEN = 32;
export const ZERO_SUSPECT = 64; // an overload may have moved the zero
export const ZERO_REFUSED = 128; // the last attempt to take a zero was refused
export const TRACKING = 256; // slow drift is being followed at this sample
export const OVER_RANGE_LATCHED = 512; // an over-range has happened since the last sticky clear

/** Bits that stay with a sample until it has left the memory of every stage behind. */
export const LINGERING = 31;

/** Bits that make a reading over-range. */
export const OVERLOAD = 3;

export const EVENT_ZERO = 65536; // level of the zero button
export const EVENT_REVERSED = 131072; // the bias is reversed
export const EVENT_QUARTER = 262144; // the bias is turned by a quarter
export const EVENT_CLEAR = 524288; // clears the latched over-range
export const EVENT_DEGAUSSED = 1048576; // the core has been degaussed

/** Every bit that has a meaning, and its words, in the order of the bits. */
export const STATUS_BITS = [
  OVER_RANGE, RAILED, CLAMPED, STUCK, SETTLING, THERMOMETER_BROKEN, ZERO_SUSPECT, ZERO_REFUSED, TRACKING,
  OVER_RANGE_LATCHED, EVENT_ZERO, EVENT_REVERSED, EVENT_QUARTER, EVENT_CLEAR, EVENT_DEGAUSSED,
];
export const STATUS_WORDS = [
  'over range', 'A/D at rail', 'arithmetic clamped', 'stuck', 'settling', 'thermometer broken', 'zero suspect',
  'zero refused', 'tracking', 'over-range latched', 'zero button', 'bias reversed', 'bias quarter', 'sticky clear',
  'degaussed',
];
