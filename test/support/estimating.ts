/** A filter plan, notes and random numbers for tests of the estimator. */
import type { Note } from '../../messages/frame.ts';
import { startBasis } from '../../onboard/core/basis.ts';
import { layOut, type FilterPlan, type PlanNumbers } from '../../onboard/core/filter.ts';

/** A plan about a 600 m ring; numbers may be replaced. */
export function planFor(change: Partial<PlanNumbers> = {}, modes = 12): FilterPlan {
  return layOut({
    basis: startBasis({ centreEastM: 0, centreNorthM: 0, halfM: 1200 }, 600, modes),
    fleetSize: 3,
    tidePerS: (2 * Math.PI) / 44_714.16,
    uniformSigmaMps: 0.15,
    tideSigmaMps: 0.15,
    modeSigmaMps: 0.13,
    modePerS: Math.sqrt(3) / 18_000,
    biasSigmaRad: 0.017,
    scaleSigma: 0.01,
    biasGrowth: 0,
    scaleGrowth: 0,
    noteSigmaMps: 0.002,
    surprise: 1e6,
    ...change,
  });
}

/** Seeded uniform numbers in (0, 1): a counter, mixed well enough that neighbouring seeds are unrelated. */
export function randomFrom(seed: number): () => number {
  let counter = Math.imul(seed, 0x9e3779b9) >>> 0;
  return () => {
    counter = (counter + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(counter ^ (counter >>> 16), 0x85ebca6b);
    mixed = Math.imul(mixed ^ (mixed >>> 13), 0xc2b2ae35);
    mixed = Math.imul((mixed ^ (mixed >>> 16)) + seed, 0x27d4eb2f);
    return (((mixed ^ (mixed >>> 15)) >>> 0) + 0.5) / 4_294_967_296;
  };
}

/** Standard normals by Box and Muller. */
export function normalsFrom(seed: number): () => number {
  const random = randomFrom(seed);
  return () => Math.sqrt(-2 * Math.log(random())) * Math.cos(2 * Math.PI * random());
}

/** Chained notes of several vehicles going round a 600 m ring, with arbitrary currents, on no grid. */
export function someNotes(seed: number, count: number, fleetSize = 3): Note[] {
  const random = randomFrom(seed);
  return Array.from({ length: count }, (_, index) => {
    const originIndex = index % fleetSize;
    const number = 1 + Math.floor(index / fleetSize);
    const endS = 300 * (number + 1) + 60 * originIndex;
    const place = (timeS: number): [number, number] => {
      const angle = timeS / 570 + (2 * Math.PI * originIndex) / fleetSize;
      return [600 * Math.sin(angle), 600 * Math.cos(angle)];
    };
    const [startEastM, startNorthM] = place(endS - 300);
    const [endEastM, endNorthM] = place(endS);
    return {
      originIndex, number, endS, durationS: 300,
      currentEastMps: random() * 0.6 - 0.3, currentNorthMps: random() * 0.6 - 0.3,
      startEastM, startNorthM, endEastM, endNorthM, sagM: -20,
      chained: number > 1, fixSigmaM: 5, skipped: 0,
    };
  });
}
