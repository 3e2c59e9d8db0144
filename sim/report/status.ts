/** Status in words. */
import { STATUS_BITS, STATUS_WORDS } from '../../lib/index.ts';

export function statusWords(status: number): string {
  const words: string[] = [];
  STATUS_BITS.forEach((bit, index) => {
    if (status & bit) words.push(STATUS_WORDS[index]);
  });
  return words.join('; ');
}
