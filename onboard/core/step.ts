/** The agent, whole. */
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';
import type { State } from './state.ts';

/** Answers one sense. */
export function step(state: State, sense: Sense): Steer {
  const { self } = state.mission;
  return {
    tick: sense.tick, heading_deg: sense.heading_deg, speed_mps: self.cruise_mps, depth_m: state.mission.depth_m,
    say: null, state: 'waiting', reasons: ['start'], heard: sense.heard.map(() => 'used' as const),
    estimate: {
      east_m: self.start.east_m, north_m: self.start.north_m, varEast_m2: 25, covEastNorth_m2: 0, varNorth_m2: 25,
      currentEast_mps: 0, currentNorth_mps: 0, varCurrentEast_m2ps2: 0.04, covCurrentEastNorth_m2ps2: 0,
      varCurrentNorth_m2ps2: 0.04, phase: 0, compassBias_deg: 0, compassBiasSigma_deg: 1, logScale: 0,
      logScaleSigma: 0.01, notesHeld: 0,
    },
    map: null,
  };
}
