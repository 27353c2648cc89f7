/** What a misspelt word was likely meant to be. */

const LONGEST = 40;

/** Letters to put in, take out or change to turn one word into the other, whatever the case. */
function edits(from: string, to: string): number {
  let row = Array.from({ length: to.length + 1 }, (_, index) => index);
  for (let i = 1; i <= from.length; i++) {
    const next = [i];
    for (let j = 1; j <= to.length; j++) {
      const change = row[j - 1]! + (from[i - 1] === to[j - 1] ? 0 : 1);
      next.push(Math.min(change, row[j]! + 1, next[j - 1]! + 1));
    }
    row = next;
  }
  return row[to.length]!;
}

/** "; did you mean …?" if an allowed word is near, else nothing. The first of equally near ones counts. */
export function didYouMean(word: string, allowed: readonly string[]): string {
  if (word.length > LONGEST) return '';
  const most = Math.max(1, Math.floor(word.length / 3));
  let best: string | null = null;
  let least = most + 1;
  for (const candidate of allowed) {
    const count = edits(word.toLowerCase(), candidate.toLowerCase());
    if (count < least) {
      least = count;
      best = candidate;
    }
  }
  return best === null ? '' : `; did you mean ${best}?`;
}

/** "a, b or c". */
export function oneOf(words: readonly string[]): string {
  return words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} or ${words.at(-1)!}`;
}
