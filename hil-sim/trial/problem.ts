/** A user's mistake in a file or an option, with its place: what was found, what is allowed. */

export interface Problem {
  /** Where: a file with line and column (from 1), or the option that brought it. */
  readonly file: string;
  readonly line: number | null;
  readonly column: number | null;
  /** Key path with dots; empty for the file as a whole. */
  readonly key: string;
  readonly found: string;
  /** Empty where nothing can be put in its place. */
  readonly allowed: string;
  /** `found` and `allowed` as one sentence. */
  readonly message: string;
}

/** Characters that would break a line or steer a terminal, as JSON writes them. */
const UNPRINTABLE = /[\u0000-\u001f\u007f-\u009f\u2028\u2029]/g;

function printable(text: string): string {
  const escape = (character: string): string => `\\u${character.charCodeAt(0).toString(16).padStart(4, '0')}`;
  return text.replace(UNPRINTABLE, escape);
}

export function problemAt(
  place: Pick<Problem, 'file' | 'line' | 'column'>,
  { key, found, allowed }: Pick<Problem, 'key' | 'found' | 'allowed'>,
): Problem {
  const { file, line, column } = place;
  const message = allowed === '' ? found : `${found}, but ${allowed}`;
  return { file, line, column, key, found, allowed, message };
}

/** One line for one mistake: `file:line:column: key: is …, but must be …`. */
export function formatProblem(problem: Problem): string {
  const { file, line, column, key, message } = problem;
  const place = line === null ? file : `${file}:${line}:${column ?? 1}`;
  return printable(key === '' ? `${place}: ${message}` : `${place}: ${key}: ${message}`);
}
