import { describe, expect, it } from 'vitest';
import { homingJ, mustTurnHome } from '../../../onboard/core/energy.ts';
import { missionFor } from '../../support/mission.ts';

const { self } = missionFor();

describe('charge for the way home', () => {
  // By hand: 1200 m at 1.2 m/s is 1000 s, at 30 W + 60 W 90 kJ; against 0.6 m/s twice that.
  it.each([
    [1200, 0, 90_000], [1200, 0.6, 180_000], [0, 0.6, 0],
  ])('of %f m against %f m/s is %f J', (distanceM, driftMps, energyJ) => {
    expect(homingJ(self, distanceM, driftMps)).toBeCloseTo(energyJ, 6);
  });

  it('stays finite when the current is stronger than the vehicle', () => {
    expect(homingJ(self, 1200, 5)).toBe(540_000);
  });

  it('is kept: the vehicle turns home when what is above the reserve is just what the way takes', () => {
    const need = { distanceM: 1200, driftMps: 0, reserve: 0.15 };
    const share = 0.15 + 90_000 / 7.2e6;
    expect(mustTurnHome(self, share + 0.001, need)).toBe(false);
    expect(mustTurnHome(self, share - 0.001, need)).toBe(true);
  });
});
