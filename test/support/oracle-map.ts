/**
 * A slow and obvious second opinion on the map: one dense Gaussian over all notes, conditioned at once.
 *
 * The measurement model is the filter's (mode value at a note's end less its rate times the time before
 * the end); the arithmetic is not: covariances of values and rates come from the Matérn-3/2 kernel
 * k(τ) = σ²(1 + λ|τ|)e^(−λ|τ|) and its derivatives, shared fixes from who shares them.
 */
import type { Note } from '../../messages/frame.ts';
import { modesAt } from '../../onboard/core/basis.ts';
import type { FilterPlan } from '../../onboard/core/filter.ts';

/** A linear functional of everything unknown. */
interface Functional {
  readonly timeS: number;
  /** On uniform (2), tide (4), then per vehicle bias and scale. */
  readonly fixed: Float64Array;
  readonly values: Float64Array;
  readonly rates: Float64Array;
  /** Weight per fix, by name. */
  readonly fixes: ReadonlyMap<string, number>;
}

const POINTS = [-0.906179845938664, -0.5384693101056831, 0, 0.5384693101056831, 0.906179845938664];
const WEIGHTS = [0.23692688505618908, 0.47862867049936647, 0.5688888888888889, 0.47862867049936647, 0.23692688505618908];

/** The place at a share of the way along the arc: the start turned about the centre of the circle. */
function onArc(note: Note, share: number): readonly [number, number] {
  const start = [note.startEastM, note.startNorthM] as const;
  const chord = [note.endEastM - start[0], note.endNorthM - start[1]] as const;
  const length = Math.sqrt(chord[0] ** 2 + chord[1] ** 2);
  const ahead = [chord[0] / length, chord[1] / length] as const;
  const middle = [start[0] + chord[0] / 2 + note.sagM * ahead[1], start[1] + chord[1] / 2 - note.sagM * ahead[0]] as const;
  const radius = (length ** 2 / 4 + note.sagM ** 2) / (2 * note.sagM);
  const centre = [middle[0] - radius * ahead[1], middle[1] + radius * ahead[0]] as const;
  const bearing = (place: readonly [number, number]): number => Math.atan2(place[0] - centre[0], place[1] - centre[1]);
  const full = 2 * (bearing(middle) - bearing(start));
  const turn = bearing(start) + share * (full - 2 * Math.PI * Math.round(full / (2 * Math.PI)));
  return [centre[0] + Math.abs(radius) * Math.sin(turn), centre[1] + Math.abs(radius) * Math.cos(turn)];
}

function noteFunctional(plan: FilterPlan, note: Note, axis: 0 | 1, isChained: boolean): Functional {
  const fixed = new Float64Array(6 + 2 * plan.fleetSize);
  const values = new Float64Array(plan.basis.count);
  const rates = new Float64Array(plan.basis.count);
  const modes = { east: new Float64Array(plan.basis.count), north: new Float64Array(plan.basis.count) };
  const chord = [note.endEastM - note.startEastM, note.endNorthM - note.startNorthM] as const;
  fixed[axis] = 1;
  for (let point = 0; point < 5; point++) {
    const share = (1 + POINTS[point]!) / 2;
    const weight = WEIGHTS[point]! / 2;
    const [eastM, northM] = onArc(note, share);
    const beforeS = (1 - share) * note.durationS;
    const angle = plan.tidePerS * (note.endS - beforeS);
    fixed[2 + 2 * axis]! += weight * Math.cos(angle);
    fixed[3 + 2 * axis]! += weight * Math.sin(angle);
    modesAt(plan.basis, eastM, northM, modes);
    const phi = axis === 0 ? modes.east : modes.north;
    for (let mode = 0; mode < values.length; mode++) {
      values[mode]! += weight * phi[mode]!;
      rates[mode]! -= weight * beforeS * phi[mode]!;
    }
  }
  const water = [chord[0] / note.durationS - note.currentEastMps, chord[1] / note.durationS - note.currentNorthMps] as const;
  fixed[6 + 2 * note.originIndex] = axis === 0 ? -water[1] : water[0];
  fixed[7 + 2 * note.originIndex] = -water[axis];
  const start = isChained ? `${note.originIndex}/${note.number - 1 - note.skipped}/${axis}` : `${note.originIndex}/before ${note.number}/${axis}`;
  const fixes = new Map([[start, -1 / note.durationS], [`${note.originIndex}/${note.number}/${axis}`, 1 / note.durationS]]);
  return { timeS: note.endS, fixed, values, rates, fixes };
}

function covariance(plan: FilterPlan, a: Functional, b: Functional, fixSigmaM: number): number {
  const sigmas = [plan.uniformSigmaMps, plan.uniformSigmaMps, ...Array<number>(4).fill(plan.tideSigmaMps)];
  let sum = 0;
  for (let at = 0; at < a.fixed.length; at++) {
    const sigma = at < 6 ? sigmas[at]! : at % 2 === 0 ? plan.biasSigmaRad : plan.scaleSigma;
    sum += a.fixed[at]! * b.fixed[at]! * sigma ** 2;
  }
  const tau = a.timeS - b.timeS;
  const rate = plan.modePerS;
  const fade = plan.modeSigmaMps ** 2 * Math.exp(-rate * Math.abs(tau));
  const valueValue = fade * (1 + rate * Math.abs(tau));
  const valueRate = fade * rate * rate * tau;
  const rateRate = fade * rate * rate * (1 - rate * Math.abs(tau));
  for (let mode = 0; mode < a.values.length; mode++) {
    sum += a.values[mode]! * b.values[mode]! * valueValue + a.values[mode]! * b.rates[mode]! * valueRate
      - a.rates[mode]! * b.values[mode]! * valueRate + a.rates[mode]! * b.rates[mode]! * rateRate;
  }
  for (const [name, weight] of a.fixes) sum += weight * (b.fixes.get(name) ?? 0) * fixSigmaM ** 2;
  return sum;
}

/** Solves A x = b for a symmetric positive matrix by plain Gaussian elimination. */
function solve(matrix: number[][], right: number[][]): number[][] {
  const size = matrix.length;
  const a = matrix.map((row, index) => [...row, ...right[index]!]);
  for (let pivot = 0; pivot < size; pivot++) {
    for (let row = pivot + 1; row < size; row++) {
      const factor = a[row]![pivot]! / a[pivot]![pivot]!;
      for (let column = pivot; column < a[row]!.length; column++) a[row]![column]! -= factor * a[pivot]![column]!;
    }
  }
  const answer = right.map((row) => row.map(() => 0));
  for (let row = size - 1; row >= 0; row--) {
    for (let column = 0; column < right[0]!.length; column++) {
      let sum = a[row]![size + column]!;
      for (let other = row + 1; other < size; other++) sum -= a[row]![other]! * answer[other]![column]!;
      answer[row]![column] = sum / a[row]![row]!;
    }
  }
  return answer;
}

/** Mean and variance of the east and north current at a place and time no earlier than the last note. */
export function oracleCurrent(
  plan: FilterPlan, notes: readonly Note[], at: { eastM: number; northM: number; atS: number },
): { east: number; north: number; varEast: number; varNorth: number } {
  const held = new Set(notes.map((note) => `${note.originIndex}/${note.number}`));
  const rows = notes.flatMap((note) => ([0, 1] as const).map((axis) => ({
    functional: noteFunctional(plan, note, axis, note.chained && held.has(`${note.originIndex}/${note.number - 1 - note.skipped}`)),
    value: axis === 0 ? note.currentEastMps : note.currentNorthMps,
    white: plan.noteSigmaMps ** 2 + (1e-5 * note.sagM) ** 2,
  })));
  const fixSigmaM = notes[0]!.fixSigmaM;
  const matrix = rows.map((a, i) => rows.map((b, j) =>
    covariance(plan, a.functional, b.functional, fixSigmaM) + (i === j ? a.white : 0)));
  const modes = { east: new Float64Array(plan.basis.count), north: new Float64Array(plan.basis.count) };
  modesAt(plan.basis, at.eastM, at.northM, modes);
  const question = (axis: 0 | 1): Functional => {
    const fixed = new Float64Array(6 + 2 * plan.fleetSize);
    fixed[axis] = 1;
    fixed[2 + 2 * axis] = Math.cos(plan.tidePerS * at.atS);
    fixed[3 + 2 * axis] = Math.sin(plan.tidePerS * at.atS);
    const values = Float64Array.from(axis === 0 ? modes.east : modes.north);
    return { timeS: at.atS, fixed, values, rates: new Float64Array(values.length), fixes: new Map() };
  };
  const answers = ([0, 1] as const).map((axis) => {
    const asked = question(axis);
    const cross = rows.map(({ functional }) => covariance(plan, asked, functional, fixSigmaM));
    const solved = solve(matrix, rows.map(({ value }, index) => [value, cross[index]!]));
    const mean = cross.reduce((sum, c, index) => sum + c * solved[index]![0]!, 0);
    const variance = covariance(plan, asked, asked, fixSigmaM) - cross.reduce((sum, c, index) => sum + c * solved[index]![1]!, 0);
    return { mean, variance };
  });
  return { east: answers[0]!.mean, north: answers[1]!.mean, varEast: answers[0]!.variance, varNorth: answers[1]!.variance };
}
