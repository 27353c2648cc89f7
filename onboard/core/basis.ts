/**
 * The space in which the current map lives: a stream function in sine products on a square box about
 * the loop, so that every map is free of divergence, as the water in the large is.
 *
 *   ψ_mn = sin(k_m x) sin(k_n y),   x, y from the box's south-west corner,   k_j = jπ / (2 L)
 *   east current = −∂ψ/∂y,   north current = ∂ψ/∂x
 *
 * Each mode has a prior variance ∝ exp(−ℓ²(k_m² + k_n²)/2), the spectrum of a squared exponential of
 * length ℓ; the strongest modes are kept, and all are scaled so that the mean variance of each current
 * component over the inner half of the box is one. Outside the box the modes are silent.
 */
import { assert } from '../../messages/assert.ts';

const ORDER_MAX = 8;

export interface Basis {
  readonly count: number;
  readonly westM: number;
  readonly southM: number;
  readonly sideM: number;
  readonly orderMost: number;
  readonly eastOrder: Uint8Array;
  readonly northOrder: Uint8Array;
  /** Mode amplitude times the wave numbers: of the east and of the north current. */
  readonly eastScale: Float64Array;
  readonly northScale: Float64Array;
  /** sin and cos of j k x and j k y, j from 0; scratch. */
  readonly trig: Float64Array;
}

export function startBasis(
  box: { centreEastM: number; centreNorthM: number; halfM: number },
  lengthM: number,
  count: number,
): Basis {
  const perM = Math.PI / (2 * box.halfM);
  const modes: { m: number; n: number; spread: number }[] = [];
  for (let m = 1; m <= ORDER_MAX; m++) {
    for (let n = 1; n <= ORDER_MAX; n++) {
      const k2 = perM * perM * (m * m + n * n);
      modes.push({ m, n, spread: Math.exp(-0.25 * lengthM * lengthM * k2) });
    }
  }
  const weight = (mode: { m: number; n: number; spread: number }): number =>
    mode.spread ** 2 * (mode.m ** 2 + mode.n ** 2);
  modes.sort((a, b) => weight(b) - weight(a) || a.m + a.n - (b.m + b.n) || a.m - b.m);
  const kept = modes.slice(0, count);
  const basis: Basis = {
    count,
    westM: box.centreEastM - box.halfM,
    southM: box.centreNorthM - box.halfM,
    sideM: 2 * box.halfM,
    orderMost: Math.max(...kept.map(({ m, n }) => Math.max(m, n))),
    eastOrder: Uint8Array.from(kept, ({ m }) => m),
    northOrder: Uint8Array.from(kept, ({ n }) => n),
    eastScale: Float64Array.from(kept, ({ n, spread }) => -spread * perM * n),
    northScale: Float64Array.from(kept, ({ m, spread }) => spread * perM * m),
    trig: new Float64Array(4 * (ORDER_MAX + 1)),
  };
  normaliseScales(basis, box);
  return basis;
}

/** Scales all modes so that a current component has unit variance on average over the inner half. */
function normaliseScales(
  basis: Basis,
  box: { centreEastM: number; centreNorthM: number; halfM: number },
): void {
  const east = new Float64Array(basis.count);
  const north = new Float64Array(basis.count);
  const steps = 16;
  let sum = 0;
  for (let i = 0; i < steps; i++) {
    for (let j = 0; j < steps; j++) {
      const offEast = ((i + 0.5) / steps - 0.5) * box.halfM;
      const offNorth = ((j + 0.5) / steps - 0.5) * box.halfM;
      modesAt(basis, box.centreEastM + offEast, box.centreNorthM + offNorth, { east, north });
      for (let mode = 0; mode < basis.count; mode++) sum += east[mode]! ** 2 + north[mode]! ** 2;
    }
  }
  const scale = 1 / Math.sqrt(sum / (2 * steps * steps));
  assert(scale > 0 && scale < Infinity, 'a basis has modes');
  for (let mode = 0; mode < basis.count; mode++) {
    basis.eastScale[mode]! *= scale;
    basis.northScale[mode]! *= scale;
  }
}

/** The current of each mode at a place, per unit of its amplitude. */
export function modesAt(
  basis: Basis,
  eastM: number,
  northM: number,
  out: { east: Float64Array; north: Float64Array },
): void {
  const x = (eastM - basis.westM) / basis.sideM;
  const y = (northM - basis.southM) / basis.sideM;
  if (!(x >= 0 && x <= 1 && y >= 0 && y <= 1)) {
    out.east.fill(0);
    out.north.fill(0);
    return;
  }
  const { trig, orderMost } = basis;
  const rows = ORDER_MAX + 1;
  const sinX = Math.sin(Math.PI * x);
  const cosX = Math.cos(Math.PI * x);
  const sinY = Math.sin(Math.PI * y);
  const cosY = Math.cos(Math.PI * y);
  trig[0] = 0;
  trig[rows] = 1;
  trig[2 * rows] = 0;
  trig[3 * rows] = 1;
  for (let order = 1; order <= orderMost; order++) {
    trig[order] = trig[order - 1]! * cosX + trig[rows + order - 1]! * sinX;
    trig[rows + order] = trig[rows + order - 1]! * cosX - trig[order - 1]! * sinX;
    trig[2 * rows + order] = trig[2 * rows + order - 1]! * cosY + trig[3 * rows + order - 1]! * sinY;
    trig[3 * rows + order] = trig[3 * rows + order - 1]! * cosY - trig[2 * rows + order - 1]! * sinY;
  }
  for (let mode = 0; mode < basis.count; mode++) {
    const m = basis.eastOrder[mode]!;
    const n = basis.northOrder[mode]!;
    out.east[mode] = basis.eastScale[mode]! * trig[m]! * trig[3 * rows + n]!;
    out.north[mode] = basis.northScale[mode]! * trig[rows + m]! * trig[2 * rows + n]!;
  }
}
