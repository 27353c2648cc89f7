/** A user's mistake in a file, with its place: what was found, what is allowed. */

export interface Problem {
  /** Where: a file with line and column (from 1), or the option that brought it. */
  readonly file: string;
  readonly line: number | null;
  readonly column: number | null;
  /** Key path with dots; empty for the file as a whole. */
  readonly key: string;
  readonly message: string;
}

/** One line for one mistake: `file:line:column: key: what is wrong, but must be …`. */
export function formatProblem(problem: Problem): string {
  const place = problem.line === null ? problem.file : `${problem.file}:${problem.line}:${problem.column ?? 1}`;
  return problem.key === '' ? `${place}: ${problem.message}` : `${place}: ${problem.key}: ${problem.message}`;
}
