/**
 * The known word that a mistyped one most likely stands for, or null. Near means: at most one edit in three letters
 * (insert, delete, replace, swap two neighbours; the optimal string alignment distance, after F. J. Damerau,
 * Communications of the ACM 7 (1964) 171, and V. I. Levenshtein, Soviet Physics Doklady 10 (1966) 707), or the same
 * name with another unit or none (`noise` or `noise_mV` for `noise_uT_per_rtHz`). Case and the two forms of the
 * micro sign make no difference.
 */
export function nearest(word: string, known: readonly string[]): string | null {
  const plainWord = plain(word);
  let best: string | null = null;
  let bestEdits = Infinity;
  for (const candidate of known) {
    const plainCandidate = plain(candidate);
    const most = Math.floor(Math.max(plainWord.length, plainCandidate.length) / 3);
    if (Math.abs(plainWord.length - plainCandidate.length) > most) continue;
    const edits = editDistance(plainWord, plainCandidate);
    if (edits <= most && edits < bestEdits) {
      best = candidate;
      bestEdits = edits;
    }
  }
  return best ?? sameNameOtherUnit(plainWord, known);
}

function plain(word: string): string {
  return word.normalize('NFKC').toLowerCase().replaceAll('\u03bc', 'u');
}

function sameNameOtherUnit(plainWord: string, known: readonly string[]): string | null {
  const name = plainWord.split('_')[0];
  if (name === '') return null;
  const alike = known.filter((candidate) => plain(candidate).split('_')[0] === name);
  return alike.length === 1 ? alike[0] : null;
}

/** Optimal string alignment distance of two words. */
export function editDistance(a: string, b: string): number {
  let beforeLast = new Array<number>(b.length + 1).fill(0);
  let last = Array.from({ length: b.length + 1 }, (_, column) => column);
  for (let row = 1; row <= a.length; row++) {
    const current = [row];
    for (let column = 1; column <= b.length; column++) {
      const replaced = last[column - 1] + (a[row - 1] === b[column - 1] ? 0 : 1);
      current[column] = Math.min(last[column] + 1, current[column - 1] + 1, replaced);
      const swapped = row > 1 && column > 1 && a[row - 1] === b[column - 2] && a[row - 2] === b[column - 1];
      if (swapped) current[column] = Math.min(current[column], beforeLast[column - 2] + 1);
    }
    beforeLast = last;
    last = current;
  }
  return last[b.length];
}
