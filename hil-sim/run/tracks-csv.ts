/** `tracks.csv`: one row per vehicle at the first tick at or after every ten seconds. */
import type { Steer } from '../../messages/steer.ts';
import type { Trial } from '../trial/schema.ts';
import type { TickRecord } from './record.ts';
import { findNearest, startNearest, trackOf, type Nearest, type Track } from './track.ts';

export const TRACKS_HEADER =
  't_s,vehicle,state,east_m,north_m,depth_m,heading_deg,speed_mps,current_east_mps,' +
  'current_north_mps,est_east_m,est_north_m,est_current_east_mps,est_current_north_mps,' +
  'phase,est_phase,battery_pct';

const EVERY_S = 10;
const TOLERANCE_S = 1e-6;
const DEG_PER_RAD = 180 / Math.PI;

export interface TracksCsv {
  readonly names: readonly string[];
  readonly track: Track;
  readonly nearest: readonly Nearest[];
  /** Number of the ten seconds that come next. */
  readonly next: Float64Array;
}

export function startTracksCsv(trial: Trial): TracksCsv {
  const names = trial.fleet.vehicles.map((vehicle) => vehicle.name);
  return {
    names,
    track: trackOf(trial.mission.loop),
    nearest: names.map(() => startNearest()),
    next: new Float64Array(1),
  };
}

/** The rows of this tick, each with its line end; empty if it is not yet time. */
export function trackRows(csv: TracksCsv, record: TickRecord): string {
  if (record.timeS < csv.next[0]! * EVERY_S - TOLERANCE_S) return '';
  csv.next[0] = Math.floor((record.timeS + TOLERANCE_S) / EVERY_S) + 1;
  let rows = '';
  for (let index = 0; index < csv.names.length; index++) rows += row(csv, record, index);
  return rows;
}

function row(csv: TracksCsv, { timeS, truth, steers }: TickRecord, index: number): string {
  const steer = steers[index] ?? null;
  const nearest = csv.nearest[index]!;
  findNearest(csv.track, truth.eastM[index]!, truth.northM[index]!, nearest);
  const headingDeg = (truth.headingRad[index]! * DEG_PER_RAD).toFixed(2);
  return (
    [
      seconds(timeS),
      csv.names[index],
      steer?.state ?? 'down',
      fixed(truth.eastM[index]!, 2),
      fixed(truth.northM[index]!, 2),
      fixed(truth.depthM[index]!, 2),
      headingDeg === '360.00' ? '0.00' : headingDeg,
      fixed(truth.speedMps[index]!, 3),
      fixed(truth.currentEastMps[index]!, 4),
      fixed(truth.currentNorthMps[index]!, 4),
      ...beliefs(steer),
      phase(nearest.place[1]!),
      steer === null ? '' : phase(steer.estimate.phase),
      fixed(100 * truth.battery[index]!, 2),
    ].join(',') + '\n'
  );
}

/** Estimated place and current; empty while the agent is down. */
function beliefs(steer: Steer | null): string[] {
  if (steer === null) return ['', '', '', ''];
  const { estimate } = steer;
  return [
    fixed(estimate.east_m, 2),
    fixed(estimate.north_m, 2),
    fixed(estimate.currentEast_mps, 4),
    fixed(estimate.currentNorth_mps, 4),
  ];
}

/** Five places, never rounded up to a whole turn. */
function phase(turns: number): string {
  const text = turns.toFixed(5);
  return text === '1.00000' ? '0.00000' : text;
}

/** No minus before a zero. */
function fixed(value: number, digits: number): string {
  const text = value.toFixed(digits);
  return text.startsWith('-') && Number(text) === 0 ? text.slice(1) : text;
}

/** Whole seconds plain, others to the millisecond. */
export function seconds(timeS: number): string {
  return Number.isInteger(timeS) ? String(timeS) : String(Number(timeS.toFixed(3)));
}
