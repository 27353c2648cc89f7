/** `frames.csv`: one row per frame and hearer, as its fate was known; a frame never heard has no time. */
import type { Hearing } from '../sea/sea.ts';
import { seconds } from './tracks-csv.ts';

export const FRAMES_HEADER = 't_sent_s,t_heard_s,from,to,bytes,fate';

export function frameRows(names: readonly string[], hearings: readonly Hearing[]): string {
  let rows = '';
  for (const { sentS, heardS, fromIndex, toIndex, bytes, fate } of hearings) {
    const heard = heardS === null ? '' : seconds(heardS);
    rows += `${seconds(sentS)},${heard},${names[fromIndex]},${names[toIndex]},${bytes},${fate}\n`;
  }
  return rows;
}
