/**
 * From a wanted motion over ground to an ordered heading and speed through the water, in a current
 * (METHODS A20). v is the speed through the water, f the current, γ the course, θ the heading:
 *
 *   velocity       s e^{iγ} = v e^{iθ} + f
 *   ground speed   s = <f,e> + √(v² − <f,ie>²)
 *   crab           sin(θ − γ) = −<f,ie>/v
 *
 * Here angles run clockwise from north, so "ie" points to the right of the course.
 */
import { wrapRad } from './angle.ts';

export interface Current {
  readonly eastMps: number;
  readonly northMps: number;
}

/** Ordered motion through the water. Caller-owned. */
export interface WaterOrder {
  headingRad: number;
  speedMps: number;
  /** Whether the current is too strong to make the course good. */
  overpowered: boolean;
}

/** The part of a current along a course, and to the right of it. */
function along(courseRad: number, current: Current): number {
  return current.eastMps * Math.sin(courseRad) + current.northMps * Math.cos(courseRad);
}

function across(courseRad: number, current: Current): number {
  return current.eastMps * Math.cos(courseRad) - current.northMps * Math.sin(courseRad);
}

/** Ground speed on a course at a speed through the water; 0 or less if the course cannot be made good. */
export function groundSpeedMps(courseRad: number, waterMps: number, current: Current): number {
  const right = across(courseRad, current);
  const rest = waterMps * waterMps - right * right;
  return rest <= 0 ? 0 : along(courseRad, current) + Math.sqrt(rest);
}

/** Heading that makes a course good at a given speed through the water; upstream as far as it goes. */
export function headingForCourse(courseRad: number, waterMps: number, current: Current): number {
  const share = waterMps > 0 ? -across(courseRad, current) / waterMps : 0;
  return courseRad + Math.asin(Math.min(1, Math.max(-1, share)));
}

/** The order that makes good `groundMps` on `courseRad`, within the speed range; the course comes first. */
export function orderForGround(
  wanted: { courseRad: number; groundMps: number; minMps: number; maxMps: number },
  current: Current,
  out: WaterOrder,
): void {
  const { courseRad } = wanted;
  const east = wanted.groundMps * Math.sin(courseRad) - current.eastMps;
  const north = wanted.groundMps * Math.cos(courseRad) - current.northMps;
  const needMps = Math.sqrt(east * east + north * north);
  out.speedMps = Math.min(wanted.maxMps, Math.max(wanted.minMps, needMps));
  // Within the range the needed way through the water is the answer; outside it the course comes first.
  const isExact = out.speedMps === needMps && needMps > 0;
  out.headingRad = wrapRad(isExact ? Math.atan2(east, north) : headingForCourse(courseRad, out.speedMps, current));
  out.overpowered = Math.abs(across(courseRad, current)) >= out.speedMps
    || groundSpeedMps(courseRad, wanted.maxMps, current) <= 0;
}
