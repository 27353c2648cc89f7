/**
 * Formed up: from the first time at which every counted vehicle is within `crossTrack` of the loop and
 * every gap within `gap` of its target for the next `hold`. Bounds are inclusive. What is measured from
 * then on is only known `hold` later, so a candidate starts, and measures begin afresh at each one.
 */
import type { Trial } from '../trial/schema.ts';

const TOLERANCE_S = 1e-6;

export interface FormedUp {
  readonly crossTrackM: number;
  readonly gapShare: number;
  readonly holdS: number;
  /** [time the candidate began, time of the last vehicle out of it]; NaN for none. */
  readonly timesS: Float64Array;
  /** [1 once formed up, fleet index of the last vehicle out of bounds, −1 for none]. */
  readonly marks: Int32Array;
}

export function startFormedUp(rule: Trial['mission']['formedUp']): FormedUp {
  return {
    crossTrackM: rule.crossTrack,
    gapShare: rule.gap,
    holdS: rule.hold,
    timesS: new Float64Array(2).fill(NaN),
    marks: Int32Array.of(0, -1),
  };
}

/** What one tick says: nothing counts yet, a candidate begins here, or measures go on. */
export type FormedUpStep = 'out' | 'begins' | 'goes-on';

/** Judges one tick; distances and gap errors are by fleet index. */
export function judgeFormedUp(
  formed: FormedUp,
  counted: Int32Array,
  at: { timeS: number; distanceM: Float64Array; gapError: Float64Array },
): FormedUpStep {
  if (formed.marks[0] === 1) return 'goes-on';
  const out = whoIsOut(formed, counted, at);
  if (out >= 0) {
    formed.marks[1] = out;
    formed.timesS[1] = at.timeS;
    formed.timesS[0] = NaN;
    return 'out';
  }
  const begins = Number.isNaN(formed.timesS[0]!);
  if (begins) formed.timesS[0] = at.timeS;
  if (at.timeS - formed.timesS[0]! >= formed.holdS - TOLERANCE_S) formed.marks[0] = 1;
  return begins ? 'begins' : 'goes-on';
}

/** The vehicle farthest off the loop if one is out, else the one whose gap is worst; −1 if all are in. */
function whoIsOut(
  formed: FormedUp,
  counted: Int32Array,
  at: { distanceM: Float64Array; gapError: Float64Array },
): number {
  let off = -1;
  let apart = -1;
  for (let place = 0; place < counted.length; place++) {
    const index = counted[place]!;
    const distanceM = at.distanceM[index]!;
    const error = Math.abs(at.gapError[index]!);
    if (!(distanceM <= formed.crossTrackM) && (off < 0 || distanceM > at.distanceM[off]!)) off = index;
    if (!(error <= formed.gapShare) && (apart < 0 || error > Math.abs(at.gapError[apart]!))) apart = index;
  }
  return off >= 0 ? off : apart;
}

export function formedUpS(formed: FormedUp): number | null {
  return formed.marks[0] === 1 ? formed.timesS[0]! : null;
}
