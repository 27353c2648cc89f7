/** For `node --import`: lists every module that the process loads, one URL a line, in the file MODULE_LIST. */
import { register } from 'node:module';

register('./list-modules-hook.mjs', import.meta.url);
