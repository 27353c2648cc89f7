/**
 * The speed along the loop that the whole fleet keeps over ground. One ground speed all round needs
 * drift + v_min ≤ u ≤ v_max − drift (METHODS part D; ground speed on a course is <f,e> + √(v² − <f,ie>²),
 * A20). Where the currents along the loop leave room, it is the nearest to the cruise speed. Where they
 * do not, no speed can be kept all round and gaps breathe: then it is the one u that vehicles keep on
 * average, held to what each point allows, so that they fall behind as much as they make up in a lap.
 */
import { groundSpeedMps } from './course.ts';
import { tangentRad, type Loop } from './loop.ts';

/** Share of the greatest speed that planning may use; the rest is for corrections. */
const USABLE_SHARE = 0.97;
/** Halvings of the range of speeds: to less than 0.1 mm/s. */
const HALVINGS = 16;
/** A point that a vehicle cannot pass is reckoned as passed very slowly, to keep the arithmetic finite. */
const CRAWL_MPS = 0.05;

export interface SpeedRange {
  readonly minMps: number;
  readonly cruiseMps: number;
  readonly maxMps: number;
}

/** The speed along the loop for currents at even phases; above 0. */
export function commonSpeedMps(
  loop: Loop, range: SpeedRange, table: { readonly east: Float64Array; readonly north: Float64Array },
): number {
  const points = table.east.length;
  const slowest = new Float64Array(points);
  const fastest = new Float64Array(points);
  let least = CRAWL_MPS;
  let most = Infinity;
  for (let point = 0; point < points; point++) {
    const courseRad = tangentRad(loop, point / points);
    const current = { eastMps: table.east[point]!, northMps: table.north[point]! };
    const fastMps = groundSpeedMps(courseRad, range.maxMps * USABLE_SHARE, current);
    const slowMps = groundSpeedMps(courseRad, range.minMps, current);
    fastest[point] = Math.max(CRAWL_MPS, fastMps);
    slowest[point] = Math.min(fastest[point]!, Math.max(CRAWL_MPS, slowMps));
    least = Math.max(least, slowest[point]!);
    most = Math.min(most, fastest[point]!);
  }
  if (least <= most) return Math.min(most, Math.max(least, range.cruiseMps));
  return keptOnAverageMps(slowest, fastest, { least: most, most: least });
}

/** The u for which the mean of u over the speed that each point allows of it is 1; that mean grows with u. */
function keptOnAverageMps(
  slowest: Float64Array, fastest: Float64Array, between: { readonly least: number; readonly most: number },
): number {
  let { least, most } = between;
  for (let halving = 0; halving < HALVINGS; halving++) {
    const middle = (least + most) / 2;
    let sum = 0;
    for (let point = 0; point < slowest.length; point++) {
      sum += middle / Math.min(fastest[point]!, Math.max(slowest[point]!, middle));
    }
    if (sum > slowest.length) most = middle;
    else least = middle;
  }
  return (least + most) / 2;
}
