/**
 * The orders to heading, speed and depth of each state.
 *
 * Joining goes straight for the meeting point with the own place of the moving pattern, in a depth
 * layer of its own. Holding follows the line: the course is the tangent a tick ahead, turned toward
 * the line by atan(cross-track / converge distance); the speed along it is the common one, corrected by
 * how far the own place is ahead; the current is fed forward (METHODS A20). Orders are by compass
 * and log, so the estimated errors of both are put in.
 */
import { assert, unreachable } from '../../messages/assert.ts';
import { wrapHalf, wrapRad } from './angle.ts';
import { groundSpeedMps, headingForCourse, orderForGround } from './course.ts';
import {
  distanceHomeM, isPlaced, type Guidance, type GuidanceInput, type GuidanceOutput,
} from './guidance-memory.ts';
import { keepClear } from './keep-clear.ts';
import { curvaturePerM, pointAt, tangentRad } from './loop.ts';
import { placePhase, turnsPerS } from './pattern.ts';
import { HOME_REACHED_M, isOnStation } from './transitions.ts';

/** Rounds of the meeting-point iteration a tick; it goes on from the tick before. */
const MEETING_ROUNDS = 3;

/** Writes heading, speed and depth for the state. */
export function steer(guidance: Guidance, input: GuidanceInput, out: GuidanceOutput): void {
  const { order, memory, mission } = guidance;
  order.overpowered = false;
  switch (memory.state) {
    case 'waiting':
      wait(guidance, input);
      out.depthM = waitingDepthM(guidance, input);
      break;
    case 'joining':
      join(guidance, input);
      keepClear(guidance, input);
      out.depthM = guidance.joiningDepthM;
      break;
    case 'holding':
      follow(guidance, input, correctionMps(guidance));
      out.depthM = memory.mayDescend ? mission.depth_m : guidance.joiningDepthM;
      break;
    case 'homing':
      goHome(guidance, input);
      out.depthM = guidance.joiningDepthM;
      break;
    case 'surfacing':
      // Having arrived, it stays by its point; an order to surface stops it where it is.
      if (memory.reason === 'arrived') stayNearHome(guidance, input);
      else stop(guidance, input);
      out.depthM = 0;
      break;
    default:
      unreachable(memory.state);
  }
  out.headingRad = order.headingRad + input.compassBiasRad;
  out.speedMps = order.speedMps * (1 + input.logScale);
  assert(Number.isFinite(out.headingRad), 'an ordered heading is finite');
  assert(out.speedMps >= 0 && out.speedMps < Infinity, 'an ordered speed is finite and not negative');
}

/** At work but without a place it goes on round, by heading alone if it knows not where; else it drifts. */
function wait(guidance: Guidance, input: GuidanceInput): void {
  const { order, pattern, loop } = guidance;
  if (!isOnStation(guidance, input)) return stop(guidance, input);
  if (isPlaced(guidance, input)) return follow(guidance, input, 0);
  order.headingRad = wrapRad(order.headingRad + curvaturePerM(loop) * pattern.speedMps * input.tickS);
  order.speedMps = pattern.speedMps;
}

/** Where fixes come only at the surface, a vehicle that needs one goes there. */
function waitingDepthM(guidance: Guidance, input: GuidanceInput): number {
  const { mission } = guidance;
  if (mission.self.fixFrom === 'surface' && !isPlaced(guidance, input)) return 0;
  return isOnStation(guidance, input) ? mission.depth_m : guidance.joiningDepthM;
}

function stop(guidance: Guidance, input: GuidanceInput): void {
  guidance.order.headingRad = wrapRad(input.headingRad - input.compassBiasRad);
  guidance.order.speedMps = 0;
}

function goHome(guidance: Guidance, input: GuidanceInput): void {
  const { homeEastM: eastM, homeNorthM: northM, range } = guidance;
  goTo(guidance, input, { eastM, northM, speedMps: range.cruiseMps });
}

function stayNearHome(guidance: Guidance, input: GuidanceInput): void {
  if (distanceHomeM(guidance, input) > HOME_REACHED_M) goHome(guidance, input);
  else stop(guidance, input);
}

/** Heads for a point at a speed through the water; flat out where that makes no way. */
function goTo(
  guidance: Guidance, input: GuidanceInput, target: { eastM: number; northM: number; speedMps: number },
): void {
  const { order, range } = guidance;
  const courseRad = Math.atan2(target.eastM - input.eastM, target.northM - input.northM);
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  const makesWay = groundSpeedMps(courseRad, target.speedMps, current) > 0;
  order.speedMps = makesWay ? target.speedMps : range.maxMps;
  order.headingRad = wrapRad(headingForCourse(courseRad, order.speedMps, current));
  order.overpowered = !makesWay && groundSpeedMps(courseRad, range.maxMps, current) <= 0;
}

/** Heads for where the own place will be when the vehicle is there. */
function join(guidance: Guidance, input: GuidanceInput): void {
  const { pattern, loop, memory, point, range } = guidance;
  const current = { eastMps: input.currentEastMps, northMps: input.currentNorthMps };
  for (let round = 0; round < MEETING_ROUNDS; round++) {
    pointAt(loop, placePhase(pattern, memory.place) + turnsPerS(pattern) * memory.meetingS, point);
    const east = point[0]! - input.eastM;
    const north = point[1]! - input.northM;
    const groundMps = groundSpeedMps(Math.atan2(east, north), range.maxMps, current);
    memory.meetingS = Math.sqrt(east * east + north * north) / Math.max(range.minMps / 2, groundMps);
  }
  goTo(guidance, input, { eastM: point[0]!, northM: point[1]!, speedMps: range.maxMps });
}

/** By how much to go faster than the fleet to be in the own place in good time. */
function correctionMps(guidance: Guidance): number {
  const { pattern, loop, memory, at, mission } = guidance;
  const { placeTime_s: placeTimeS, speedCorrection_mps: most } = mission.onboard;
  const behindM = wrapHalf(placePhase(pattern, memory.place) - at.phase) * loop.lengthM;
  return Math.min(most, Math.max(-most, behindM / placeTimeS));
}

/** Follows the line at the fleet's speed and a correction. */
function follow(guidance: Guidance, input: GuidanceInput, correction: number): void {
  const { pattern, loop, at, range, order, mission } = guidance;
  const aheadTurns = turnsPerS(pattern) * input.tickS;
  const backRad = Math.atan(at.crossTrackM / mission.onboard.converge_m);
  const courseRad = tangentRad(loop, at.phase + aheadTurns) - backRad;
  const groundMps = Math.max(0, pattern.speedMps + correction);
  orderForGround(
    { courseRad, groundMps, minMps: range.minMps, maxMps: range.maxMps },
    { eastMps: input.currentEastMps, northMps: input.currentNorthMps },
    order,
  );
}
