/**
 * Whether the charge still brings the vehicle home: P = hotel + cruise·(v/cruise speed)³ at cruise
 * speed, against the strongest current that the loop shows, with a reserve kept back.
 */
import type { SelfMessage } from '../../messages/mission.ts';

/** However strong the current is believed to be, progress home is reckoned at no less than this. */
const PROGRESS_LEAST_MPS = 0.2;

/** Energy to make good `distanceM` against `driftMps`. */
export function homingJ(self: SelfMessage, distanceM: number, driftMps: number): number {
  const progressMps = Math.max(PROGRESS_LEAST_MPS, self.cruise_mps - driftMps);
  return ((self.powerHotel_W + self.powerCruise_W) * distanceM) / progressMps;
}

/** Whether charge (share of full), less the reserve, is no more than the way home takes. */
export function mustTurnHome(
  self: SelfMessage, battery: number, need: { distanceM: number; driftMps: number; reserve: number },
): boolean {
  return (battery - need.reserve) * self.battery_J <= homingJ(self, need.distanceM, need.driftMps);
}
