/** The hook of list-modules.mjs; it runs beside the process's own modules. */
import { appendFileSync } from 'node:fs';

export async function load(url, context, next) {
  appendFileSync(process.env.MODULE_LIST, `${url}\n`);
  return next(url, context);
}
