/** Guesses at misspelt words; distances as in Wagner and Fischer (1974), counted by hand. */
import { describe, expect, it } from 'vitest';
import { didYouMean, oneOf } from '../../../hil-sim/trial/spelling.ts';

describe('didYouMean', () => {
  it.each([
    ['recovry', ['depth', 'recovery'], 'recovery'],
    ['Radius', ['radius'], 'radius'],
    // kitten, sitting: three edits, of which a word of six may have two, one of nine three.
    ['kitten', ['sitting'], null],
    ['sitting', ['sittings', 'sitting2'], 'sittings'],
    ['at', ['fat', 'cat'], 'fat'],
    ['x', ['abc'], null],
    ['', ['a'], 'a'],
    ['x'.repeat(41), ['x'.repeat(40)], null],
  ])('for %j among %j is %j', (word, allowed, meant) => {
    expect(didYouMean(word, allowed)).toBe(meant === null ? '' : `; did you mean ${meant}?`);
  });
});

describe('oneOf', () => {
  it('lists words as people do', () => {
    const lists = [[], ['a'], ['a', 'b'], ['a', 'b', 'c']];
    expect(lists.map(oneOf)).toEqual(['', 'a', 'a or b', 'a, b or c']);
  });
});
