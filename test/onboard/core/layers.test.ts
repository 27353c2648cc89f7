import { describe, expect, it } from 'vitest';
import { homePoint, joiningDepthM } from '../../../onboard/core/layers.ts';
import { missionFor } from '../../support/mission.ts';

describe('layers of joining', () => {
  it('are more than 5 m apart from each other and from the line, as far as there is room', () => {
    const depths = [40, ...Array.from({ length: 5 }, (_, index) => joiningDepthM(40, index))];
    for (const [index, depthM] of depths.entries()) {
      expect(depthM).toBeGreaterThan(3);
      for (const other of depths.slice(index + 1)) expect(Math.abs(depthM - other)).toBeGreaterThan(5);
    }
  });

  it('are shared in turn by larger fleets, and are the line\'s own depth in shallow water', () => {
    expect(joiningDepthM(40, 6)).toBe(joiningDepthM(40, 0));
    expect(joiningDepthM(6, 3)).toBe(6);
  });
});

describe('points at the recovery place', () => {
  it.each([2, 5, 16])('of %i vehicles are at least 100 m apart', (count) => {
    const points = Array.from({ length: count }, (_, index) => homePoint(missionFor(0, count), index));
    for (const [index, { eastM, northM }] of points.entries()) {
      for (const other of points.slice(index + 1)) {
        expect(Math.sqrt((eastM - other.eastM) ** 2 + (northM - other.northM) ** 2)).toBeGreaterThan(100);
      }
    }
  });

  it('of a lone vehicle is the recovery place itself', () => {
    expect(homePoint(missionFor(0, 1), 0)).toEqual({ eastM: -1500, northM: 0 });
  });
});
