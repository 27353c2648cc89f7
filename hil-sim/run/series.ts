/**
 * What the report draws over time: each error as its root mean square in equal bins of time, a few
 * states as they were last in a bin, and the tracks themselves at a finer step. Sized at start.
 */

const BINS_MOST = 360;
const BIN_STEP_S = 10;
const POINTS_MOST = 1100;
const TOLERANCE_S = 1e-6;

/** Errors, as root mean square in each bin. */
export const BINNED = ['crossTrack', 'gap', 'current', 'position'] as const;
export type Binned = (typeof BINNED)[number];
/** States, as they were at the end of each bin. */
export const SAMPLED = ['depth', 'speed', 'battery'] as const;
export type Sampled = (typeof SAMPLED)[number];

export interface Series {
  readonly binS: number;
  readonly bins: number;
  readonly pointS: number;
  readonly points: number;
  /** By vehicle × bins: sums of squares, after `finishSeries` root mean squares; NaN where nothing is. */
  readonly binned: Readonly<Record<Binned, Float64Array>>;
  readonly binCounts: Readonly<Record<Binned, Uint32Array>>;
  readonly sampled: Readonly<Record<Sampled, Float64Array>>;
  /** Fleet: frames offered to hearers, and heard, in each bin. */
  readonly offered: Float64Array;
  readonly heard: Float64Array;
  /** By vehicle × points. */
  readonly trackEastM: Float64Array;
  readonly trackNorthM: Float64Array;
}

/** Bins of a whole number of ten seconds, at most 360; track points at least as fine as a bin. */
export function startSeries(fleetSize: number, durationS: number): Series {
  const binS = BIN_STEP_S * Math.max(1, Math.ceil(durationS / BINS_MOST / BIN_STEP_S));
  const pointS = 5 * Math.max(1, Math.ceil(durationS / POINTS_MOST / 5));
  const bins = Math.floor(durationS / binS) + 1;
  const points = Math.floor(durationS / pointS) + 1;
  const column = (length: number): Float64Array => new Float64Array(length);
  const nothing = (): Float64Array => column(fleetSize * bins).fill(NaN);
  const counts = (): Uint32Array => new Uint32Array(fleetSize * bins);
  const sums = (): Float64Array => column(fleetSize * bins);
  return {
    binS,
    bins,
    pointS,
    points,
    binned: { crossTrack: sums(), gap: sums(), current: sums(), position: sums() },
    binCounts: { crossTrack: counts(), gap: counts(), current: counts(), position: counts() },
    sampled: { depth: nothing(), speed: nothing(), battery: nothing() },
    offered: column(bins),
    heard: column(bins),
    trackEastM: column(fleetSize * points).fill(NaN),
    trackNorthM: column(fleetSize * points).fill(NaN),
  };
}

export function binAt(series: Series, timeS: number): number {
  return Math.min(series.bins - 1, Math.floor((timeS + TOLERANCE_S) / series.binS));
}

/** Takes the square of an error of one vehicle. */
export function addToBin(series: Series, name: Binned, at: number, square: number): void {
  series.binned[name][at]! += square;
  series.binCounts[name][at]! += 1;
}

/** Keeps a track point if its time has come: the first tick at or after each step. */
export function keepPoint(series: Series, index: number, timeS: number, eastM: number, northM: number): void {
  const place = index * series.points + Math.floor((timeS + TOLERANCE_S) / series.pointS);
  if (series.trackEastM[place] === series.trackEastM[place]) return;
  series.trackEastM[place] = eastM;
  series.trackNorthM[place] = northM;
}

/** Turns sums into root mean squares, in place; once. */
export function finishSeries(series: Series): void {
  for (const name of BINNED) {
    const values = series.binned[name];
    const counts = series.binCounts[name];
    for (let at = 0; at < values.length; at++) {
      values[at] = counts[at] === 0 ? NaN : Math.sqrt(values[at]! / counts[at]!);
    }
  }
}
