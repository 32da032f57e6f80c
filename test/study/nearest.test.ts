import { describe, expect, it } from 'vitest';
import { editDistance, nearestWord, suggestWord } from '../../src/study/nearest.ts';

describe('the word that was meant', () => {
  // F. J. Damerau, "A technique for computer detection and correction of spelling errors", CACM 7:171–176, 1964
  // (from memory): one wrong, missing, extra letter or two letters swapped is one error. `kitten`/`sitting`: 3,
  // the customary example of V. Levenshtein's distance.
  it.each([
    ['kitten', 'sitting', 3],
    ['horizon', 'horizon', 0],
    ['horizon', 'hroizon', 1],
    ['', 'abc', 3],
    ['abc', '', 3],
    ['fit', 'fits', 1],
  ])('%s and %s are %i errors apart (closed form)', (a, b, distance) => {
    expect(editDistance(a, b)).toBe(distance);
    expect(editDistance(b, a)).toBe(distance);
  });

  it('a slip, a wrong case or a missing letter is recognised, another word is not', () => {
    const words = ['horizon', 'blocks', 'terminal', 'preview'];
    expect(nearestWord('horzion', words)).toBe('horizon');
    expect(nearestWord('HORIZON', words)).toBe('horizon');
    expect(nearestWord('block', words)).toBe('blocks');
    expect(nearestWord('colour', words)).toBeUndefined();
    expect(nearestWord('', words)).toBeUndefined();
  });

  it('without a near word all of them are offered', () => {
    expect(suggestWord('colour', ['min', 'max'], 'the keys here are')).toBe('the keys here are: min, max');
    expect(suggestWord('colour', [], 'the keys here are')).toBe('there are none to choose from');
  });
});
