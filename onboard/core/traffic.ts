/**
 * Other vehicles that have to be kept clear of, as arrays sized at start: where they are by now and how
 * they move over ground. The first `count` entries hold; keep-clear.ts fills them anew each tick.
 */

export interface Traffic {
  count: number;
  readonly eastM: Float64Array;
  readonly northM: Float64Array;
  readonly eastMps: Float64Array;
  readonly northMps: Float64Array;
}

export function startTraffic(fleetSize: number): Traffic {
  const make = (): Float64Array => new Float64Array(fleetSize);
  return { count: 0, eastM: make(), northM: make(), eastMps: make(), northMps: make() };
}
