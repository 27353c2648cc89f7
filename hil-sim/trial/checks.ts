/**
 * Relations between the keys of a trial, each checked once, before the first tick. A finding names the
 * key to change, the numbers on both sides, and what would be allowed.
 */
import { FRAME_BYTES, FRAME_POSITION_MAX_M } from '../../messages/frame.ts';
import { SETTINGS, type Setting, type SettingKey } from '../../messages/settings.ts';
import { formatQuantity, type Dimension } from '../../messages/units.ts';
import type { Path } from './documents.ts';
import { checkScript } from './fault-checks.ts';
import type { Finding } from './finding.ts';
import { offsetsOf } from './missions.ts';
import type { Trial, TrialCurrent } from './schema.ts';
import { fullVehicles } from './vehicles.ts';

/** Slow sound makes the longest travel time: cold, fresh water (METHODS A1 spans 1402 to 1560 m/s). */
const SOUND_LEAST_MPS = 1400;
const ROW_S = 10;
const MINUTE_S = 60;
const WHOLE = 1e-9;

export function checkTrial(trial: Trial): Finding[] {
  return [
    ...checkFleet(trial),
    ...checkPlaces(trial),
    ...checkLoop(trial),
    ...checkTimes(trial),
    ...checkModem(trial),
    ...checkSettings(trial),
    ...checkLimits(trial),
    ...checkScript(trial),
  ];
}

/** A number as a person reads it: few digits, with its unit. */
function say(value: number, dimension: Dimension): string {
  return formatQuantity(Number(value.toPrecision(4)), dimension);
}

interface Circle {
  readonly centre: { readonly east: number; readonly north: number };
  readonly radius: number;
}

function distance(a: { east: number; north: number }, b: { east: number; north: number }): number {
  return Math.sqrt((a.east - b.east) ** 2 + (a.north - b.north) ** 2);
}

function checkFleet(trial: Trial): Finding[] {
  const findings: Finding[] = [];
  const seen = new Map<string, number>();
  fullVehicles(trial).forEach((vehicle, index) => {
    const at = (...keys: string[]): Path => ['fleet', 'vehicles', index, ...keys];
    const first = seen.get(vehicle.name);
    if (first !== undefined) {
      findings.push({
        path: at('name'),
        message: `is ${vehicle.name}, which vehicle ${first + 1} of the list has already, but must be unique`,
      });
    }
    seen.set(vehicle.name, index);
    const { min, cruise, max } = vehicle.speed;
    if (!(min <= cruise && cruise <= max)) {
      findings.push({
        path: at('speed'),
        message: `has min ${say(min, 'speed')}, cruise ${say(cruise, 'speed')}, ` +
          `max ${say(max, 'speed')}, but must be in that order`,
      });
    }
    if (!(vehicle.fix.every >= trial.tick)) {
      findings.push({
        path: at('fix', 'every'),
        message: `is ${say(vehicle.fix.every, 'time')}, but must be at least a tick of ${say(trial.tick, 'time')}`,
      });
    }
    if (!(vehicle.fix.latency < vehicle.fix.every)) {
      findings.push({
        path: at('fix', 'latency'),
        message: `is ${say(vehicle.fix.latency, 'time')}, ` +
          `but must be less than the ${say(vehicle.fix.every, 'time')} between fixes`,
      });
    }
  });
  const offsets = offsetsOf(trial);
  if (offsets.length !== trial.fleet.vehicles.length) {
    findings.push({
      path: ['mission', 'spacing'],
      message: `has ${offsets.length} offsets, but must have one per vehicle: ${trial.fleet.vehicles.length}`,
    });
  }
  if (new Set(offsets).size !== offsets.length) {
    findings.push({
      path: ['mission', 'spacing'],
      message: 'has the same offset twice, but two vehicles cannot share a place',
    });
  }
  return findings;
}

function checkPlaces(trial: Trial): Finding[] {
  const findings: Finding[] = [];
  const { keepIn, keepOut, loop, recovery } = trial.mission;
  const mustLieIn = (path: Path, what: string, circle: Circle): void => {
    const reach = distance(circle.centre, keepIn.centre) + circle.radius;
    if (reach > keepIn.radius) {
      findings.push({
        path,
        message: `${what} reaches ${say(reach, 'length')} from the centre of keepIn, ` +
          `but must stay within its ${say(keepIn.radius, 'length')}`,
      });
    }
  };
  const mustMiss = (path: Path, what: string, place: { east: number; north: number }): void => {
    keepOut.forEach((area, index) => {
      if (distance(place, area.centre) < area.radius) {
        findings.push({
          path,
          message: `${what} lies inside mission.keepOut.${index}, but must lie outside`,
        });
      }
    });
  };
  mustLieIn(['mission', 'loop'], 'the loop', loop);
  mustLieIn(['mission', 'recovery'], 'recovery', { centre: recovery, radius: 0 });
  mustMiss(['mission', 'recovery'], 'recovery', recovery);
  trial.fleet.vehicles.forEach(({ name, start }, index) => {
    const path = ['fleet', 'vehicles', index, 'start'];
    mustLieIn(path, `the start of ${name}`, { centre: start, radius: 0 });
    mustMiss(path, `the start of ${name}`, start);
  });
  keepOut.forEach((area, index) => {
    const between = distance(area.centre, loop.centre);
    if (
      between + area.radius > loop.radius &&
      between < loop.radius + area.radius &&
      Math.abs(between - loop.radius) < area.radius
    ) {
      findings.push({
        path: ['mission', 'keepOut', index],
        message: 'covers part of the loop, but the loop must stay clear of it',
      });
    }
  });
  const reach = distance(keepIn.centre, { east: 0, north: 0 }) + keepIn.radius;
  if (reach > FRAME_POSITION_MAX_M) {
    findings.push({
      path: ['mission', 'keepIn'],
      message: `reaches ${say(reach, 'length')} from the datum, ` +
        `but a frame can say positions to ${say(FRAME_POSITION_MAX_M, 'length')}: move the datum or shrink the area`,
    });
  }
  return findings;
}

/** The fastest that a current of this kind flows anywhere inside keepIn. */
function driftMost(current: TrialCurrent, keepIn: Circle): number {
  switch (current.kind) {
    case 'uniform':
      return current.drift;
    case 'tide':
      return Math.max(Math.abs(current.major), Math.abs(current.minor));
    case 'eddy':
      return current.peak;
    case 'shear': {
      const off = Math.abs(
        keepIn.centre.east * Math.cos(current.bearing) - keepIn.centre.north * Math.sin(current.bearing),
      );
      return (Math.abs(current.gradient) / current.over) * (off + keepIn.radius);
    }
  }
}

/** The turn-rate need on a circle in a current is at most (v+f)²/(R·v) (METHODS A20). */
function checkLoop(trial: Trial): Finding[] {
  const { loop } = trial.mission;
  const within: Circle = { centre: loop.centre, radius: loop.radius };
  const driftMps = trial.water.currents.reduce((sum, current) => sum + driftMost(current, within), 0);
  const findings: Finding[] = [];
  fullVehicles(trial).forEach((vehicle, index) => {
    const v = vehicle.speed.cruise;
    const radiusLeast = (v + driftMps) ** 2 / (v * vehicle.turnRate);
    if (!(loop.radius >= radiusLeast)) {
      findings.push({
        path: ['mission', 'loop', 'radius'],
        message:
          `is ${say(loop.radius, 'length')}, too tight for ${vehicle.name}: ` +
          `with ${say(v, 'speed')} cruise, ${say(driftMps, 'speed')} of current and ` +
          `${say(vehicle.turnRate, 'angleRate')} of turn it must be at least ${say(radiusLeast, 'length')}`,
      });
    }
    if (!(driftMps < vehicle.speed.max)) {
      findings.push({
        path: ['fleet', 'vehicles', index, 'speed'],
        message: `has a max of ${say(vehicle.speed.max, 'speed')}, ` +
          `but the currents on the loop may add up to ${say(driftMps, 'speed')}, which it must exceed`,
      });
    }
  });
  return findings;
}

function isWhole(ratio: number): boolean {
  return Math.abs(ratio - Math.round(ratio)) < WHOLE && ratio > 0.5;
}

function checkTimes(trial: Trial): Finding[] {
  const findings: Finding[] = [];
  if (!isWhole(ROW_S / trial.tick) || !isWhole(MINUTE_S / trial.tick)) {
    findings.push({
      path: ['tick'],
      message: `is ${say(trial.tick, 'time')}, but must divide 10 s, the step of tracks.csv`,
    });
  }
  if (!isWhole(trial.duration / trial.tick)) {
    findings.push({
      path: ['duration'],
      message: `is ${say(trial.duration, 'time')}, but must be a whole number of ticks of ${say(trial.tick, 'time')}`,
    });
  }
  return findings;
}

/** A slot must hold turn-on, air time, guard and travel time across keepIn (METHODS A8). */
function checkModem(trial: Trial): Finding[] {
  const { modem, mission } = trial;
  const findings: Finding[] = [];
  const airS = (8 * modem.frame) / modem.bitRate;
  const travelS = (2 * mission.keepIn.radius) / SOUND_LEAST_MPS;
  const needS = modem.turnOn + airS + modem.guard + travelS;
  if (!(modem.slot >= needS)) {
    findings.push({
      path: ['modem', 'slot'],
      message:
        `is ${say(modem.slot, 'time')}, but must hold ${say(modem.turnOn, 'time')} turn-on, ` +
        `${say(airS, 'time')} air time, ${say(modem.guard, 'time')} guard and ` +
        `${say(travelS, 'time')} travel across keepIn: at least ${say(needS, 'time')}`,
    });
  }
  if (modem.frame !== FRAME_BYTES) {
    findings.push({
      path: ['modem', 'frame'],
      message: `is ${modem.frame} B, but the agents' frame has ${FRAME_BYTES} B`,
    });
  }
  return findings;
}

function checkSettings(trial: Trial): Finding[] {
  const given = trial.onboard as Record<string, number | undefined>;
  const findings: Finding[] = [];
  const dimensions: Partial<Record<string, Dimension>> = {
    s: 'time',
    m: 'length',
    mps: 'speed',
    deg: 'angle',
    share: 'share',
  };
  for (const key of Object.keys(SETTINGS) as SettingKey[]) {
    const setting: Setting = SETTINGS[key];
    const value = given[key];
    const dimension = dimensions[setting.unit];
    if (value === undefined || dimension === undefined) continue;
    const factor = setting.unit === 'deg' ? Math.PI / 180 : 1;
    if (!(value >= setting.min * factor && value <= setting.max * factor)) {
      findings.push({
        path: ['onboard', key],
        message: `is ${say(value, dimension)}, but must be ${say(setting.min * factor, dimension)} ` +
          `to ${say(setting.max * factor, dimension)}: ${setting.says}`,
      });
    }
  }
  return findings;
}

function checkLimits(trial: Trial): Finding[] {
  const names = trial.fleet.vehicles.map(({ name }) => name);
  return (trial.limits.except ?? []).flatMap((name, index) =>
    names.includes(name)
      ? []
      : [
          {
            path: ['limits', 'except', index],
            message: `is ${name}, but must be a vehicle of the fleet: ${names.join(', ')}`,
          },
        ],
  );
}
