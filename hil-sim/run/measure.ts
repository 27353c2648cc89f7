/**
 * The measures of a run, from truth and steers alone, tick by tick, by mathematics that no agent shares.
 *
 * A vehicle named in `limits.except` does not count for forming up, the loop, gaps, currents, maps and
 * positions; its place stays in the pattern, and a gap that spans it has both targets. It always counts for
 * separation, frames and energy. From `formUp_s` on every counted vehicle counts at every tick,
 * whatever state it claims, until the script ends its part (`parts.ts`). Separation is in
 * space (depth included). Every array is sized at start.
 */
import { assert } from '../../messages/assert.ts';
import type { MapMessage, Steer } from '../../messages/steer.ts';
import type { Trial } from '../trial/schema.ts';
import { formedUpS, judgeFormedUp, startFormedUp, type FormedUp } from './formed-up.ts';
import { measureGaps, startGaps, type Gaps } from './gaps.ts';
import { startHearings, takeHearing, type HearingCounts } from './hearings.ts';
import { startMaps, takeMaps, type Maps, type Water } from './maps.ts';
import { isOut, nextChangeS, outSpans, type OutSpan } from './parts.ts';
import type { TickRecord } from './record.ts';
import { addToBin, binAt, keepPoint, startSeries, type Series } from './series.ts';
import { addSquare, addTo, clearTally, startTally, type Tally } from './tally.ts';
import { findNearest, startNearest, trackOf, type Nearest, type Track } from './track.ts';

/** Vehicles farther apart in depth than this pass each other. */
const SAME_DEPTH_M = 5;

/** Tallies that count from forming up on. */
export interface LoopTallies {
  readonly crossTrack: Tally;
  readonly gap: Tally;
  readonly current: Tally;
  readonly position: Tally;
  readonly mapError: Tally;
  readonly mapSpread: Tally;
}

export interface Measures {
  readonly trial: Trial;
  readonly water: Water;
  readonly names: readonly string[];
  /** Fleet indices of the vehicles that count now, their gaps, and when that changes. */
  readonly part: { counted: Int32Array; gaps: Gaps; changesS: number };
  readonly outSpans: readonly OutSpan[];
  readonly except: readonly string[];
  readonly isCounted: Uint8Array;
  readonly track: Track;
  readonly nearest: readonly Nearest[];
  /** By fleet index, renewed each tick. */
  readonly distanceM: Float64Array;
  readonly phases: Float64Array;
  readonly formed: FormedUp;
  readonly tallies: LoopTallies;
  readonly maps: Maps;
  readonly givenMaps: (MapMessage | null)[];
  readonly hearings: HearingCounts;
  readonly series: Series;
  /** [least distance squared, its time]; and the two vehicles. */
  readonly separation: Float64Array;
  readonly separationPair: Int32Array;
  /** First time at which a limit on a greatest or least value broke: crossTrackMax, separationMin; NaN. */
  readonly breachS: Float64Array;
  readonly crossTrackLimitM: number;
  readonly separationLimitM: number;
  readonly energyJ: Float64Array;
  readonly battery: Float64Array;
  readonly lateTicks: Float64Array;
  /** [ticks taken, time of the last]. */
  readonly progress: Float64Array;
}

/** Measures of a run that has not begun; `water` tells the true current at a place and time. */
export function startMeasures(trial: Trial, water: Water): Measures {
  const names = trial.fleet.vehicles.map((vehicle) => vehicle.name);
  const fleetSize = names.length;
  const except = trial.limits.except ?? [];
  const counted = names.flatMap((name, index) => (except.includes(name) ? [] : [index]));
  const track = trackOf(trial.mission.loop);
  const spans = outSpans(trial, track.lengthM);
  const ticks = Math.ceil(trial.duration / trial.tick) + 1;
  const column = (): Float64Array => new Float64Array(fleetSize);
  const tally = (): Tally => startTally(fleetSize);
  return {
    trial,
    water,
    names,
    track,
    part: {
      counted: Int32Array.from(counted),
      gaps: startGaps(spacingOf(trial), counted, { fleetSize, lengthM: track.lengthM }),
      changesS: nextChangeS(spans, -1),
    },
    outSpans: spans,
    except,
    isCounted: Uint8Array.from(names, (name) => (except.includes(name) ? 0 : 1)),
    nearest: names.map(() => startNearest()),
    distanceM: column(),
    phases: column(),
    formed: startFormedUp(trial.mission.formedUp),
    tallies: {
      crossTrack: tally(),
      gap: tally(),
      current: tally(),
      position: tally(),
      mapError: tally(),
      mapSpread: tally(),
    },
    maps: startMaps(track, trial.duration),
    givenMaps: names.map(() => null),
    hearings: startHearings(fleetSize, ticks, trial.tick),
    series: startSeries(fleetSize, trial.duration),
    separation: Float64Array.of(Infinity, NaN),
    separationPair: Int32Array.of(-1, -1),
    breachS: new Float64Array(2).fill(NaN),
    crossTrackLimitM: trial.limits.crossTrackMax ?? Infinity,
    separationLimitM: trial.limits.separationMin ?? 0,
    energyJ: column(),
    battery: column(),
    lateTicks: column(),
    progress: Float64Array.of(0, 0),
  };
}

/** Even spacing with a vehicle excepted is the whole fleet's pattern, in which its place stays open. */
function spacingOf(trial: Trial): Trial['mission']['spacing'] {
  const { spacing } = trial.mission;
  const count = trial.fleet.vehicles.length;
  if (spacing !== 'even' || (trial.limits.except ?? []).length === 0) return spacing;
  return Array.from({ length: count }, (_, index) => index / count);
}

/** Takes one tick; ticks come in order. */
export function takeTick(m: Measures, record: TickRecord): void {
  const { timeS, truth } = record;
  assert(record.steers.length === m.names.length, 'there is a steer for every vehicle');
  for (let index = 0; index < m.names.length; index++) {
    const nearest = m.nearest[index]!;
    findNearest(m.track, truth.eastM[index]!, truth.northM[index]!, nearest);
    m.distanceM[index] = nearest.place[0]!;
    m.phases[index] = nearest.place[1]!;
  }
  if (timeS >= m.part.changesS) renewPart(m, timeS);
  const { counted, gaps } = m.part;
  measureGaps(gaps, m.phases);
  const step =
    counted.length === 0
      ? 'out'
      : judgeFormedUp(m.formed, counted, { timeS, distanceM: m.distanceM, gapError: gaps.error });
  if (step === 'begins') beginAfresh(m);
  tallyVehicles(m, record, step !== 'out');
  tallyMaps(m, record, step !== 'out');
  tallySeparation(m, record);
  tallyHearings(m, record);
  m.progress[0]! += 1;
  m.progress[1] = timeS;
}

/** Who counts from now on; gaps and their targets are those of the vehicles that do. */
function renewPart(m: Measures, timeS: number): void {
  const { trial, names, except, outSpans: spans, isCounted, part } = m;
  const counted = names.flatMap((name, index) =>
    except.includes(name) || isOut(spans, index, timeS) ? [] : [index],
  );
  isCounted.fill(0);
  for (const index of counted) isCounted[index] = 1;
  part.counted = Int32Array.from(counted);
  part.gaps = startGaps(spacingOf(trial), counted, {
    fleetSize: names.length,
    lengthM: m.track.lengthM,
  });
  part.changesS = nextChangeS(spans, timeS);
}

function beginAfresh(m: Measures): void {
  const { crossTrack, gap, current, position, mapError, mapSpread } = m.tallies;
  clearTally(crossTrack);
  clearTally(gap);
  clearTally(current);
  clearTally(position);
  clearTally(mapError);
  clearTally(mapSpread);
  m.breachS[0] = NaN;
}

function tallyVehicles(m: Measures, record: TickRecord, counts: boolean): void {
  const { timeS, truth, steers } = record;
  const { tallies, series } = m;
  const bin = binAt(series, timeS);
  for (let index = 0; index < m.names.length; index++) {
    const eastM = truth.eastM[index]!;
    const northM = truth.northM[index]!;
    const steer = steers[index] ?? null;
    const at = index * series.bins + bin;
    const distanceM = m.distanceM[index]!;
    addToBin(series, 'crossTrack', at, distanceM * distanceM);
    series.sampled.depth[at] = truth.depthM[index]!;
    series.sampled.speed[at] = truth.speedMps[index]!;
    series.sampled.battery[at] = truth.battery[index]!;
    keepPoint(series, index, timeS, eastM, northM);
    m.energyJ[index] = truth.energyJ[index]!;
    m.battery[index] = truth.battery[index]!;
    if (steer !== null)
      tallyBelief(m, record, { index, at, steer, counts: counts && m.isCounted[index] === 1 });
    if (m.isCounted[index] === 0) continue;
    const gapError = Math.abs(m.part.gaps.error[index]!);
    addToBin(series, 'gap', at, gapError * gapError);
    if (!counts) continue;
    addTo(tallies.crossTrack, index, distanceM, timeS);
    addTo(tallies.gap, index, gapError, timeS);
    if (distanceM > m.crossTrackLimitM && Number.isNaN(m.breachS[0]!)) m.breachS[0] = timeS;
  }
}

/** What a vehicle believes against what is; an agent that is down believes nothing. */
function tallyBelief(
  m: Measures,
  record: TickRecord,
  of: { index: number; at: number; steer: Steer; counts: boolean },
): void {
  const { truth, timeS } = record;
  const { index, at, steer } = of;
  const { estimate } = steer;
  const current2 = normSquare(
    estimate.currentEast_mps - truth.currentEastMps[index]!,
    estimate.currentNorth_mps - truth.currentNorthMps[index]!,
  );
  const position2 = normSquare(
    estimate.east_m - truth.eastM[index]!,
    estimate.north_m - truth.northM[index]!,
  );
  addToBin(m.series, 'current', at, current2);
  addToBin(m.series, 'position', at, position2);
  if (steer.tick !== record.tick) m.lateTicks[index]! += 1;
  if (!of.counts) return;
  addSquare(m.tallies.current, index, current2, timeS);
  addSquare(m.tallies.position, index, position2, timeS);
}

function normSquare(east: number, north: number): number {
  return east * east + north * north;
}

function tallyMaps(m: Measures, record: TickRecord, counts: boolean): void {
  let given = 0;
  for (let index = 0; index < m.names.length; index++) {
    const map = m.isCounted[index] === 1 ? (record.steers[index]?.map ?? null) : null;
    m.givenMaps[index] = map;
    if (map !== null) given += 1;
  }
  if (given === 0) return;
  takeMaps(m.maps, m.givenMaps, {
    timeS: record.timeS,
    water: m.water,
    error: counts ? m.tallies.mapError : null,
    spread: counts ? m.tallies.mapSpread : null,
  });
}

function tallySeparation(m: Measures, record: TickRecord): void {
  const { eastM, northM, depthM } = record.truth;
  let least = m.separation[0]!;
  for (let one = 0; one < eastM.length; one++) {
    for (let other = one + 1; other < eastM.length; other++) {
      const down = depthM[one]! - depthM[other]!;
      if (down > SAME_DEPTH_M || down < -SAME_DEPTH_M) continue;
      const east = eastM[one]! - eastM[other]!;
      const north = northM[one]! - northM[other]!;
      const apart2 = east * east + north * north + down * down;
      if (apart2 >= least) continue;
      least = apart2;
      m.separation[0] = least;
      m.separation[1] = record.timeS;
      m.separationPair[0] = one;
      m.separationPair[1] = other;
    }
  }
  if (Number.isNaN(m.breachS[1]!) && least < m.separationLimitM * m.separationLimitM)
    m.breachS[1] = record.timeS;
}

function tallyHearings(m: Measures, record: TickRecord): void {
  if (record.hearings.length === 0) return;
  const bin = binAt(m.series, record.timeS);
  for (const hearing of record.hearings) {
    if (!takeHearing(m.hearings, hearing)) continue;
    m.series.offered[bin]! += 1;
    if (hearing.fate === 'heard') m.series.heard[bin]! += 1;
  }
}

/** The start of the time from which measures count; null if the fleet has not formed up. */
export function measuredFromS(m: Measures): number | null {
  return formedUpS(m.formed);
}
