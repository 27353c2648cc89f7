/** The vehicles of a fleet with every key: what `each` says, overridden per vehicle. */
import type { Trial } from './schema.ts';

type Each = Trial['fleet']['each'];

export type FullVehicle = Each & Pick<Trial['fleet']['vehicles'][number], 'name' | 'start'>;

/** Values of `over` in place of those of `base`, group by group; absent ones leave the base. */
function overlay<T>(base: T, over: unknown): T {
  if (over === undefined) return base;
  const areGroups = typeof base === 'object' && base !== null && typeof over === 'object' && over !== null;
  if (!areGroups) return over as T;
  const merged: Record<string, unknown> = { ...(base as Record<string, unknown>) };
  for (const [key, value] of Object.entries(over)) merged[key] = overlay(merged[key], value);
  return merged as T;
}

/** Every vehicle in fleet order. */
export function fullVehicles(trial: Trial): FullVehicle[] {
  const { each, vehicles } = trial.fleet;
  return vehicles.map((vehicle) => overlay({ ...each, name: vehicle.name, start: vehicle.start }, vehicle));
}
