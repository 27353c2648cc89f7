/** Relations within and between vehicles, and between them and the pattern of places. */
import { sayQuantity } from '../../messages/units.ts';
import type { Finding } from './finding.ts';
import { offsetsOf } from './missions.ts';
import type { Trial } from './schema.ts';
import { fullVehicles, type FullVehicle } from './vehicles.ts';

/** No vehicle is launched with less: a battery that cruises so short is a slip of units. */
const ENDURANCE_LEAST_S = 60;
/** Two vehicles closer than this stand in one place. */
const APART_LEAST_M = 1;
/** Stands for every vehicle in faults and orders. */
const EVERYONE = 'all';

export function checkFleet(trial: Trial): Finding[] {
  const vehicles = fullVehicles(trial);
  return [
    ...vehicles.flatMap((_vehicle, index) => [...checkName(vehicles, index), ...checkStart(trial, index)]),
    ...onceEach(vehicles.flatMap((vehicle, index) => checkBody(trial, vehicle, index))),
    ...checkSpacing(trial),
  ];
}

/** What `each` says wrong is wrong for every vehicle, and told once. */
function onceEach(findings: readonly Finding[]): Finding[] {
  const keys = findings.map(({ path }) => path.join('.'));
  return findings.filter((_finding, index) => keys.indexOf(keys[index]!) === index);
}

function checkName(vehicles: readonly FullVehicle[], index: number): Finding[] {
  const path = ['fleet', 'vehicles', index, 'name'];
  const { name } = vehicles[index]!;
  if (name === EVERYONE) {
    return [{ path, found: `is ${name}`, allowed: 'must be another name: this one stands for all' }];
  }
  const first = vehicles.findIndex((vehicle) => vehicle.name === name);
  if (first === index) return [];
  return [{ path, found: `is ${name}, the name of fleet.vehicles.${first}`, allowed: 'must be unique' }];
}

/** What one vehicle can do, as `each` and its own keys say together. */
function checkBody(trial: Trial, vehicle: FullVehicle, index: number): Finding[] {
  const findings: Finding[] = [];
  const tell = (keys: readonly string[], found: string, allowed: string): void => {
    findings.push({ path: keyOf(trial, index, keys), found, allowed });
  };
  const speed = (value: number): string => sayQuantity(value, 'speed');
  const time = (value: number): string => sayQuantity(value, 'time');
  const { min, cruise, max } = vehicle.speed;
  if (!(min <= cruise && cruise <= max)) {
    const found = `has min ${speed(min)}, cruise ${speed(cruise)}, max ${speed(max)}`;
    tell(['speed'], found, 'must be in that order');
  }
  const { every, latency } = vehicle.fix;
  if (!(every >= trial.tick)) {
    tell(['fix', 'every'], `is ${time(every)}`, `must be at least a tick of ${time(trial.tick)}`);
  }
  if (!(latency < every)) {
    tell(['fix', 'latency'], `is ${time(latency)}`, `must be less than the ${time(every)} between fixes`);
  }
  const powerW = vehicle.power.hotel + vehicle.power.cruise;
  if (!(vehicle.battery >= ENDURANCE_LEAST_S * powerW)) {
    tell(
      ['battery'],
      `is ${sayQuantity(vehicle.battery, 'energy')}`,
      `must last ${time(ENDURANCE_LEAST_S)} of cruise at ${sayQuantity(powerW, 'power')}: `
      + `at least ${sayQuantity(ENDURANCE_LEAST_S * powerW, 'energy')}`,
    );
  }
  return findings;
}

/** The vehicle's own key if it has one, else that of `each`. */
function keyOf(trial: Trial, index: number, keys: readonly string[]): (string | number)[] {
  let own: unknown = trial.fleet.vehicles[index];
  for (const key of keys) own = (own as Record<string, unknown> | undefined)?.[key];
  return own === undefined ? ['fleet', 'each', ...keys] : ['fleet', 'vehicles', index, ...keys];
}

function checkStart(trial: Trial, index: number): Finding[] {
  const { vehicles } = trial.fleet;
  const { start } = vehicles[index]!;
  const path = ['fleet', 'vehicles', index, 'start'];
  const findings: Finding[] = [];
  if (!(start.depth < trial.water.bottom)) {
    const allowed = `must be above the bottom at ${sayQuantity(trial.water.bottom, 'length')}`;
    findings.push({ path: [...path, 'depth'], found: `is ${sayQuantity(start.depth, 'length')}`, allowed });
  }
  const other = vehicles.slice(0, index).find((earlier) => {
    const east = earlier.start.east - start.east;
    const north = earlier.start.north - start.north;
    const down = earlier.start.depth - start.depth;
    return east * east + north * north + down * down < APART_LEAST_M * APART_LEAST_M;
  });
  if (other !== undefined) {
    findings.push({ path, found: `is that of ${other.name}`, allowed: 'must be a place of its own' });
  }
  return findings;
}

function checkSpacing(trial: Trial): Finding[] {
  const path = ['mission', 'spacing'];
  const offsets = offsetsOf(trial);
  const count = trial.fleet.vehicles.length;
  if (offsets.length !== count) {
    return [{ path, found: `has ${offsets.length} offsets`, allowed: `must have one per vehicle: ${count}` }];
  }
  const twice = offsets.findIndex((offset, index) => offsets.indexOf(offset) !== index);
  if (twice < 0) return [];
  const found = `is ${offsets[twice]!} again`;
  return [{ path: [...path, twice], found, allowed: 'must be a place of its own' }];
}
