/**
 * The true current at a place and time: the sum of its kinds, one current at all depths.
 *
 * Conventions of the trial file: set is the direction toward which the water flows, clockwise from
 * north. Tide: major·cos(ωt − phase) toward `bearing`, minor·sin(ωt − phase) 90° to its left. Eddy:
 * Lamb-Oseen, v = Γ/(2πr)·(1 − e^(−r²/rc²)), whose speed peaks at 1.1209 rc (METHODS A20). Shear: flows
 * toward `bearing`, zero on the line through the datum along it, growing to the right of it.
 */
import type { AddedCurrent } from './faults.ts';
import type { CurrentPlan } from './plan.ts';

/** Where a Lamb-Oseen vortex is fastest, in core radii: the root of 2x² = e^(x²) − 1. */
const PEAK_AT_CORES = 1.1209064227785366;
/** 1 − e^(−x²) there. */
const PEAK_SHARE = 1 - Math.exp(-PEAK_AT_CORES * PEAK_AT_CORES);

/** Adds one kind of current at a place and time to `out` (east, north in m/s). */
function addCurrent(kind: CurrentPlan, at: Place, out: Float64Array): void {
  switch (kind.kind) {
    case 'uniform':
      out[0]! += kind.driftMps * Math.sin(kind.setRad);
      out[1]! += kind.driftMps * Math.cos(kind.setRad);
      return;
    case 'tide': {
      const angle = (2 * Math.PI * at.timeS) / kind.periodS - kind.phaseRad;
      const along = kind.majorMps * Math.cos(angle);
      const left = kind.minorMps * Math.sin(angle);
      const sin = Math.sin(kind.bearingRad);
      const cos = Math.cos(kind.bearingRad);
      out[0]! += along * sin - left * cos;
      out[1]! += along * cos + left * sin;
      return;
    }
    case 'eddy':
      addEddy(kind, at, out);
      return;
    case 'shear': {
      const sin = Math.sin(kind.bearingRad);
      const cos = Math.cos(kind.bearingRad);
      const rightM = at.eastM * cos - at.northM * sin;
      out[0]! += kind.gradientPerS * rightM * sin;
      out[1]! += kind.gradientPerS * rightM * cos;
      return;
    }
    default:
      kind satisfies never;
  }
}

interface Place {
  readonly eastM: number;
  readonly northM: number;
  readonly timeS: number;
}

function addEddy(eddy: Extract<CurrentPlan, { kind: 'eddy' }>, at: Place, out: Float64Array): void {
  const wayM = eddy.movingDriftMps * at.timeS;
  const eastM = at.eastM - (eddy.centreEastM + wayM * Math.sin(eddy.movingSetRad));
  const northM = at.northM - (eddy.centreNorthM + wayM * Math.cos(eddy.movingSetRad));
  const r2 = eastM * eastM + northM * northM;
  const coreM = eddy.radiusM / PEAK_AT_CORES;
  const x2 = r2 / (coreM * coreM);
  // Speed over distance: peak·radius/share · (1 − e^(−x²))/r², whose limit at the centre is 1/core².
  const share = x2 > 1e-12 ? -Math.expm1(-x2) / r2 : 1 / (coreM * coreM);
  const perS = ((eddy.peakMps * eddy.radiusM) / PEAK_SHARE) * share;
  const sense = eddy.turn === 'anticlockwise' ? 1 : -1;
  out[0]! -= sense * perS * northM;
  out[1]! += sense * perS * eastM;
}

/** The true water: its currents, and those that faults add for a span. */
export interface Water {
  readonly currents: readonly CurrentPlan[];
  readonly added: readonly AddedCurrent[];
}

/** The true current at a place and true time, written to `out` as east, north in m/s. */
export function currentAt(water: Water, at: Place, out: Float64Array): void {
  out[0] = 0;
  out[1] = 0;
  for (const kind of water.currents) addCurrent(kind, at, out);
  for (const { atS, untilS, current } of water.added) {
    if (atS <= at.timeS && at.timeS < untilS) addCurrent(current, at, out);
  }
}
