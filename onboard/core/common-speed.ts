/**
 * The speed along the loop that the whole fleet keeps over ground. One ground speed all round needs
 * drift + v_min ≤ u ≤ v_max − drift; from the currents along the loop each vehicle finds the greatest
 * u that its speed range allows everywhere, up to its cruise speed (METHODS A20: ground speed on a
 * course is <f,e> + √(v² − <f,ie>²)). It changes slowly, so that vehicles whose maps differ a little
 * keep nearly the same.
 */
import { groundSpeedMps } from './course.ts';
import { tangentRad, type Loop } from './loop.ts';

/** Share of the greatest speed that planning may use; the rest is for corrections. */
const USABLE_SHARE = 0.97;

export interface SpeedRange {
  readonly minMps: number;
  readonly cruiseMps: number;
  readonly maxMps: number;
}

/** The speed along the loop for currents at `count` even phases. */
export function commonSpeedMps(loop: Loop, range: SpeedRange, table: { east: Float64Array; north: Float64Array }): number {
  let most = Infinity;
  let least = 0;
  const points = table.east.length;
  for (let point = 0; point < points; point++) {
    const courseRad = tangentRad(loop, point / points);
    const current = { eastMps: table.east[point]!, northMps: table.north[point]! };
    most = Math.min(most, groundSpeedMps(courseRad, range.maxMps * USABLE_SHARE, current));
    least = Math.max(least, groundSpeedMps(courseRad, range.minMps, current));
  }
  if (!(least <= most)) return Math.max(range.minMps, (least + most) / 2);
  return Math.min(Math.max(range.cruiseMps, least), Math.max(most, range.minMps / 2));
}
