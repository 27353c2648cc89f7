/** Senses and steers for tests: the barest and the fullest of each, every value written out. */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';

export const SENSE_BARE: Sense = {
  tick: 0, at_s: 0, heading_deg: 0, speed_mps: 0, depth_m: 0, battery: 1, fix: null, heard: [], orders: [],
};

export const SENSE_FULL: Sense = {
  tick: 4660, at_s: 4660.5, heading_deg: 359.75, speed_mps: 1.25, depth_m: 40.125, battery: 0.5,
  fix: { at_s: 4658.5, east_m: -900.25, north_m: 150.5, sigma_m: 5 },
  heard: [{ at_s: 4659.25, bytes: '00ff' }, { at_s: 4660.125, bytes: 'a5' }],
  orders: ['hold', 'home', 'surface', 'resume'],
};

const ESTIMATE: Steer['estimate'] = {
  east_m: 1.5, north_m: -2.5, varEast_m2: 4, covEastNorth_m2: -0.25, varNorth_m2: 9,
  currentEast_mps: 0.125, currentNorth_mps: -0.0625,
  varCurrentEast_m2ps2: 0.0025, covCurrentEastNorth_m2ps2: 0.0001, varCurrentNorth_m2ps2: 0.0036,
  phase: 0.75, compassBias_deg: 1.5, compassBiasSigma_deg: 0.5, logScale: 0.01, logScaleSigma: 0.005, notesHeld: 17,
};

export const STEER_BARE: Steer = {
  tick: 0, heading_deg: 40, speed_mps: 1.2, depth_m: 0, say: null, state: 'waiting', reasons: ['no-fix-yet'],
  heard: [], estimate: ESTIMATE, map: null,
};

const sixtyFour = (of: (index: number) => number): number[] => Array.from({ length: 64 }, (_, index) => of(index));

export const STEER_FULL: Steer = {
  tick: 4660, heading_deg: 0, speed_mps: 1.6, depth_m: 40, say: 'dead', state: 'surfacing',
  reasons: ['battery-low', 'position-uncertain'], heard: ['used', 'check', 'time'], estimate: ESTIMATE,
  map: {
    east_mps: sixtyFour((index) => index / 64),
    north_mps: sixtyFour((index) => 0 - index / 64),
    sigma_mps: sixtyFour(() => 0.05),
  },
};
