/** Number of edits (insert, delete, replace, swap neighbours) between two words (F. Damerau, CACM 7:171–176, 1964). */
export function editDistance(a: string, b: string): number {
  const rows = [Array.from({ length: b.length + 1 }, (_, j) => j)];
  for (let i = 1; i <= a.length; i++) {
    const row = [i];
    for (let j = 1; j <= b.length; j++) {
      const same = a[i - 1] === b[j - 1] ? 0 : 1;
      row[j] = Math.min(row[j - 1] + 1, rows[i - 1][j] + 1, rows[i - 1][j - 1] + same);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) {
        row[j] = Math.min(row[j], rows[i - 2][j - 2] + 1);
      }
    }
    rows.push(row);
  }
  return rows[a.length][b.length];
}

/** The word that was probably meant, if one is near: at most a third of its letters differ. */
export function nearestWord(word: string, words: readonly string[]): string | undefined {
  const lower = word.toLowerCase().slice(0, 80);
  let best: string | undefined;
  let least = Number.POSITIVE_INFINITY;
  for (const candidate of words) {
    const distance = editDistance(lower, candidate.toLowerCase());
    if (distance < least && distance <= Math.max(1, candidate.length / 3)) {
      best = candidate;
      least = distance;
    }
  }
  return best;
}

/** `did you mean X?`, or else the words that may stand there. */
export function suggestWord(word: string, words: readonly string[], noun: string): string {
  const near = nearestWord(word, words);
  if (near !== undefined) return `did you mean ${near}?`;
  return words.length > 0 ? `${noun}: ${words.join(', ')}` : `there are none to choose from`;
}
