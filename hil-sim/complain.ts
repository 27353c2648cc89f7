/** What goes wrong is said on standard error, a line at a time. */
export function complain(lines: readonly string[]): void {
  for (const line of lines) process.stderr.write(`${line}\n`);
}
