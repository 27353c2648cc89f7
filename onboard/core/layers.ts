/**
 * How vehicles that are under way keep clear of each other: by depth. Those that join or go home use
 * layers above the depth at which the fleet holds its line, one after another in fleet order; where the
 * water above has room for fewer layers than vehicles, some share one. At the recovery place each has
 * a point of its own on a small ring.
 */
import type { Mission } from '../../messages/mission.ts';

/** More than the 5 m of depth within which vehicles count as near each other (DESIGN part 6), and reserve. */
const LAYER_M = 6;
/** No layer is shallower, for waves and hulls. */
const SHALLOWEST_M = 4;
/** Distance between neighbouring points at the recovery place. */
const HOME_APART_M = 120;

/** Depth of the layer in which a vehicle joins and goes home; the line's own depth if there is no room. */
export function joiningDepthM(depthM: number, vehicleIndex: number): number {
  const layers = Math.floor((depthM - SHALLOWEST_M) / LAYER_M);
  return layers < 1 ? depthM : depthM - LAYER_M * (1 + (vehicleIndex % layers));
}

/** A vehicle's own point at the recovery place. */
export function homePoint(mission: Mission, vehicleIndex: number): { eastM: number; northM: number } {
  const count = mission.fleet.length;
  const ringM = count === 1 ? 0 : HOME_APART_M / (2 * Math.sin(Math.PI / count));
  const bearingRad = (2 * Math.PI * vehicleIndex) / count;
  return {
    eastM: mission.recovery.east_m + ringM * Math.sin(bearingRad),
    northM: mission.recovery.north_m + ringM * Math.cos(bearingRad),
  };
}
