/**
 * The closed line that the fleet holds: place ↔ phase, by arc length, growing in the direction of
 * travel. Phase 0 of a circle lies due north of its centre.
 *
 * Cross-track is positive to the right of travel. Curvature is positive where the line bends to the
 * right (a clockwise circle). Every shape answers the same questions; a new one is a case more.
 */
import type { LoopMessage } from '../../messages/shape.ts';
import { wrapTurns } from './angle.ts';

const TURN_RAD = 2 * Math.PI;

export interface Loop {
  readonly shape: 'circle';
  readonly centreEastM: number;
  readonly centreNorthM: number;
  readonly radiusM: number;
  /** 1 clockwise, −1 anticlockwise. */
  readonly turn: 1 | -1;
  readonly lengthM: number;
}

/** Where a vehicle is, seen from the loop. Caller-owned. */
export interface LoopPlace {
  phase: number;
  crossTrackM: number;
}

export function makeLoop(message: LoopMessage): Loop {
  return {
    shape: 'circle',
    centreEastM: message.centre.east_m,
    centreNorthM: message.centre.north_m,
    radiusM: message.radius_m,
    turn: message.turn === 'clockwise' ? 1 : -1,
    lengthM: TURN_RAD * message.radius_m,
  };
}

/** The nearest place on the loop, and how far beside it; at the very centre, phase 0. */
export function nearestPlace(loop: Loop, eastM: number, northM: number, out: LoopPlace): void {
  const east = eastM - loop.centreEastM;
  const north = northM - loop.centreNorthM;
  const distanceM = Math.sqrt(east * east + north * north);
  out.phase = wrapTurns((loop.turn * Math.atan2(east, north)) / TURN_RAD);
  out.crossTrackM = loop.turn * (loop.radiusM - distanceM);
}

/** The point of the loop at a phase (any turn), written to `out` as east, north. */
export function pointAt(loop: Loop, phase: number, out: Float64Array): void {
  const bearingRad = loop.turn * TURN_RAD * phase;
  out[0] = loop.centreEastM + loop.radiusM * Math.sin(bearingRad);
  out[1] = loop.centreNorthM + loop.radiusM * Math.cos(bearingRad);
}

/** Direction of travel at a phase, clockwise from north, any turn. */
export function tangentRad(loop: Loop, phase: number): number {
  return loop.turn * (TURN_RAD * phase + Math.PI / 2);
}

/** Bend of the line at a phase, per metre, positive to the right. */
export function curvaturePerM(loop: Loop): number {
  return loop.turn / loop.radiusM;
}
