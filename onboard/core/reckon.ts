/**
 * Dead reckoning since the last fix, and the position that follows from it.
 *
 * Position = fix − its error + D − s D − β D⊥ + ∫ current along the way, all of one state vector: with
 * the errors of fix, compass and log in the filter, a fix is blended, not put in the place of what was
 * known. The way is kept as sums over the ticks since the fix: the way through the water D, and, for
 * each mode of the map, ∫ φ dt and ∫ φ (t − t0) dt, so that later knowledge of the current corrects
 * the position too. Nothing here grows: a leg is a handful of sums.
 */
import { chosen } from './bank.ts';
import { modesAt } from './basis.ts';
import { TIDE_AT, type FilterPlan } from './filter.ts';
import { filterTimeS, planNow, spreadOf, type CurrentMap } from './map.ts';
import { transition } from './predict.ts';

/** Sums since a moment t0. */
export interface Leg {
  startS: number;
  seconds: number;
  waterEastM: number;
  waterNorthM: number;
  /** Way carried by a current that was given (yardstick runs); 0 otherwise. */
  carriedEastM: number;
  carriedNorthM: number;
  tideCosS: number;
  tideSinS: number;
  readonly eastS: Float64Array;
  readonly northS: Float64Array;
  readonly eastS2: Float64Array;
  readonly northS2: Float64Array;
}

/** Where a leg starts: a place with its stated error, and whether that error is in the filter. */
export interface Anchor {
  eastM: number;
  northM: number;
  sigmaM: number;
  /** Number of the own note that ends with this fix; 0 if none. */
  noteNumber: number;
  isFix: boolean;
}

export function startLeg(modes: number): Leg {
  return {
    startS: 0, seconds: 0, waterEastM: 0, waterNorthM: 0, carriedEastM: 0, carriedNorthM: 0,
    tideCosS: 0, tideSinS: 0,
    eastS: new Float64Array(modes), northS: new Float64Array(modes),
    eastS2: new Float64Array(modes), northS2: new Float64Array(modes),
  };
}

export function resetLeg(leg: Leg, startS: number): void {
  leg.startS = startS;
  leg.seconds = 0;
  leg.waterEastM = 0;
  leg.waterNorthM = 0;
  leg.carriedEastM = 0;
  leg.carriedNorthM = 0;
  leg.tideCosS = 0;
  leg.tideSinS = 0;
  leg.eastS.fill(0);
  leg.northS.fill(0);
  leg.eastS2.fill(0);
  leg.northS2.fill(0);
}

/** One tick of way: how long, how far through the water, and where. */
export interface Way {
  readonly midS: number;
  readonly seconds: number;
  readonly waterEastM: number;
  readonly waterNorthM: number;
  readonly eastM: number;
  readonly northM: number;
  readonly carriedEastM: number;
  readonly carriedNorthM: number;
}

export function addWay(plan: FilterPlan, leg: Leg, way: Way): void {
  const { modes, tide } = plan.scratch;
  leg.seconds += way.seconds;
  leg.waterEastM += way.waterEastM;
  leg.waterNorthM += way.waterNorthM;
  leg.carriedEastM += way.carriedEastM;
  leg.carriedNorthM += way.carriedNorthM;
  const angle = plan.tidePerS * way.midS;
  tide[0] = Math.cos(angle);
  tide[1] = Math.sin(angle);
  leg.tideCosS += way.seconds * tide[0];
  leg.tideSinS += way.seconds * tide[1];
  modesAt(plan.basis, way.eastM, way.northM, modes);
  const sinceS = way.midS - leg.startS;
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const east = way.seconds * modes.east[mode]!;
    const north = way.seconds * modes.north[mode]!;
    leg.eastS[mode]! += east;
    leg.northS[mode]! += north;
    leg.eastS2[mode]! += east * sinceS;
    leg.northS2[mode]! += north * sinceS;
  }
}

/** Each mode's mean at the start of the leg and its change per second: what a tick needs of the map. */
export interface Drift {
  readonly value: Float64Array;
  readonly rate: Float64Array;
}

export function startDrift(modes: number): Drift {
  return { value: new Float64Array(modes), rate: new Float64Array(modes) };
}

/** Renews the drift after a change of map or leg. */
export function renewDrift(map: CurrentMap, leg: Leg, drift: Drift): void {
  const plan = planNow(map);
  const filter = chosen(map.active);
  const f = transition(plan.modePerS, leg.startS - filterTimeS(filter, leg.startS));
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const value = filter.mean[plan.valueAt + mode]!;
    const rate = filter.mean[plan.rateAt + mode]!;
    drift.value[mode] = f.valueOfValue * value + f.valueOfRate * rate;
    drift.rate[mode] = f.rateOfValue * value + f.rateOfRate * rate;
  }
}

/** Moves the mean position on by the way that `addWay` has just added: the same sums, one tick more. */
export function movePosition(
  map: CurrentMap,
  of: { leg: Leg; way: Way; drift: Drift; selfIndex: number },
  out: PositionAnswer,
): void {
  const { plan } = map;
  const { leg, way, drift, selfIndex } = of;
  const { mean } = chosen(map.active);
  const { modes, tide } = plan.scratch;
  const sinceS = way.midS - leg.startS;
  const beta = mean[plan.biasAt + 2 * selfIndex]!;
  const scale = mean[plan.biasAt + 2 * selfIndex + 1]!;
  let east = mean[0]! + tide[0]! * mean[TIDE_AT]! + tide[1]! * mean[TIDE_AT + 1]!;
  let north = mean[1]! + tide[0]! * mean[TIDE_AT + 2]! + tide[1]! * mean[TIDE_AT + 3]!;
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const value = drift.value[mode]! + sinceS * drift.rate[mode]!;
    east += value * modes.east[mode]!;
    north += value * modes.north[mode]!;
  }
  const { waterEastM, waterNorthM, seconds } = way;
  out.eastM += waterEastM + way.carriedEastM + seconds * east - beta * waterNorthM - scale * waterEastM;
  out.northM += waterNorthM + way.carriedNorthM + seconds * north + beta * waterEastM - scale * waterNorthM;
}

/** Rows of the position in the state vector; caller-owned. */
export interface PositionRows {
  readonly east: Float64Array;
  readonly north: Float64Array;
}

/** Whether the anchor's error is the fix error that the filter keeps for this vehicle. */
export function isInFilter(map: CurrentMap, anchor: Anchor, selfIndex: number): boolean {
  return anchor.noteNumber > 0 && chosen(map.active).lastNumber[selfIndex] === anchor.noteNumber;
}

/** Writes the rows; what they do not cover is `anchor + water`. */
export function writePositionRows(
  map: CurrentMap, of: { leg: Leg; anchor: Anchor; selfIndex: number }, rows: PositionRows,
): void {
  const plan = planNow(map);
  const active = chosen(map.active);
  const { leg, anchor, selfIndex } = of;
  const { east, north } = rows;
  east.fill(0);
  north.fill(0);
  east[0] = leg.seconds;
  north[1] = leg.seconds;
  east[TIDE_AT] = leg.tideCosS;
  east[TIDE_AT + 1] = leg.tideSinS;
  north[TIDE_AT + 2] = leg.tideCosS;
  north[TIDE_AT + 3] = leg.tideSinS;
  const f = transition(plan.modePerS, leg.startS - filterTimeS(active, leg.startS));
  for (let mode = 0; mode < plan.basis.count; mode++) {
    const v = plan.valueAt + mode;
    const r = plan.rateAt + mode;
    east[v] = f.valueOfValue * leg.eastS[mode]! + f.rateOfValue * leg.eastS2[mode]!;
    east[r] = f.valueOfRate * leg.eastS[mode]! + f.rateOfRate * leg.eastS2[mode]!;
    north[v] = f.valueOfValue * leg.northS[mode]! + f.rateOfValue * leg.northS2[mode]!;
    north[r] = f.valueOfRate * leg.northS[mode]! + f.rateOfRate * leg.northS2[mode]!;
  }
  const bias = plan.biasAt + 2 * selfIndex;
  east[bias] = -leg.waterNorthM;
  north[bias] = leg.waterEastM;
  east[bias + 1] = -leg.waterEastM;
  north[bias + 1] = -leg.waterNorthM;
  if (!isInFilter(map, anchor, selfIndex)) return;
  east[plan.fixAt + 2 * selfIndex] = -1;
  north[plan.fixAt + 2 * selfIndex + 1] = -1;
}

/** Position with its covariance. Caller-owned. */
export interface PositionAnswer {
  eastM: number;
  northM: number;
  varEastM2: number;
  covEastNorthM2: number;
  varNorthM2: number;
}

/** The mean position from written rows. */
export function meanPosition(
  map: CurrentMap, of: { leg: Leg; anchor: Anchor }, rows: PositionRows, out: PositionAnswer,
): void {
  const { mean } = chosen(map.active);
  let eastM = of.anchor.eastM + of.leg.waterEastM + of.leg.carriedEastM;
  let northM = of.anchor.northM + of.leg.waterNorthM + of.leg.carriedNorthM;
  for (let at = 0; at < mean.length; at++) {
    eastM += rows.east[at]! * mean[at]!;
    northM += rows.north[at]! * mean[at]!;
  }
  out.eastM = eastM;
  out.northM = northM;
}

/** The covariance of the position from written rows; `whiteM2` per axis is the noise of compass and log. */
export function positionSpread(
  map: CurrentMap,
  of: { anchor: Anchor; selfIndex: number; whiteM2: number },
  rows: PositionRows,
  out: PositionAnswer,
): void {
  const { size } = map.plan;
  const own = isInFilter(map, of.anchor, of.selfIndex) ? 0 : of.anchor.sigmaM ** 2;
  const extra = own + of.whiteM2;
  const { gain } = map.scratch;
  spreadOf(chosen(map.active), size, { ...rows, extent: size }, gain);
  out.varEastM2 = gain[0]! + extra;
  out.covEastNorthM2 = gain[1]!;
  out.varNorthM2 = gain[2]! + extra;
}
