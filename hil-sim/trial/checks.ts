/**
 * Relations between the keys of a trial, each checked once, before the first tick. A finding names the
 * key to change, the numbers on both sides, and what would be allowed.
 */
import { FRAME_BYTES } from '../../messages/frame.ts';
import { sayQuantity } from '../../messages/units.ts';
import { checkScript } from './fault-checks.ts';
import type { Finding } from './finding.ts';
import { checkFleet } from './fleet-checks.ts';
import { checkLoop, checkPlaces } from './place-checks.ts';
import type { Trial } from './schema.ts';

/** Slow sound makes the longest travel time: cold, fresh water (METHODS A1 spans 1402 to 1560 m/s). */
const SOUND_LEAST_MPS = 1400;
/** The steps of what a run records: rows of tracks, and maps on whole minutes. */
const ROW_S = 10;
const WHOLE = 1e-9;

export function checkTrial(trial: Trial): Finding[] {
  return [
    ...checkFleet(trial),
    ...checkPlaces(trial),
    ...checkLoop(trial),
    ...checkTimes(trial),
    ...checkModem(trial),
    ...checkLimits(trial),
    ...checkScript(trial),
  ];
}

const sayTime = (timeS: number): string => sayQuantity(timeS, 'time');

/** Whether `ratio` is a whole number from 1, up to rounding. */
function isWhole(ratio: number): boolean {
  return Math.abs(ratio - Math.round(ratio)) < WHOLE && ratio > 0.5;
}

/** Whether the calendar has the day and the clock the time; the schema has seen to the form. */
function isTime(text: string): boolean {
  const ms = Date.parse(text);
  return Number.isFinite(ms) && new Date(ms).toISOString().startsWith(text.slice(0, -1));
}

function checkTimes(trial: Trial): Finding[] {
  const { tick, duration, start, mission } = trial;
  const findings: Finding[] = [];
  if (start !== undefined && !isTime(start)) {
    const allowed = 'must be a day and a time that there is';
    findings.push({ path: ['start'], found: `is ${start}`, allowed });
  }
  if (!isWhole(ROW_S / tick)) {
    const allowed = `must divide ${ROW_S} s, the step of tracks.csv`;
    findings.push({ path: ['tick'], found: `is ${sayTime(tick)}`, allowed });
  }
  if (!isWhole(duration / tick)) {
    const allowed = `must be a whole number of ticks of ${sayTime(tick)}`;
    findings.push({ path: ['duration'], found: `is ${sayTime(duration)}`, allowed });
  }
  const { hold } = mission.formedUp;
  if (!(hold < duration)) {
    const allowed = `must be less than the trial's ${sayTime(duration)}, or no fleet counts as formed up`;
    findings.push({ path: ['mission', 'formedUp', 'hold'], found: `is ${sayTime(hold)}`, allowed });
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
      found: `is ${sayTime(modem.slot)}`,
      allowed: `must hold ${sayTime(modem.turnOn)} turn-on, ${sayTime(airS)} air time, `
        + `${sayTime(modem.guard)} guard and ${sayTime(travelS)} travel across keepIn: `
        + `at least ${sayTime(needS)}`,
    });
  }
  if (modem.frame !== FRAME_BYTES) {
    const allowed = `must be ${FRAME_BYTES} B, the agents' frame`;
    findings.push({ path: ['modem', 'frame'], found: `is ${sayQuantity(modem.frame, 'size')}`, allowed });
  }
  return findings;
}

function checkLimits(trial: Trial): Finding[] {
  const names = trial.fleet.vehicles.map(({ name }) => name);
  const except = trial.limits.except ?? [];
  const path = ['limits', 'except'];
  if (names.every((name) => except.includes(name))) {
    return [{ path, found: 'names every vehicle', allowed: 'must leave one to be measured' }];
  }
  return except.flatMap((name, index) => {
    if (names.includes(name)) return [];
    const allowed = `must be a vehicle of the fleet: ${names.join(', ')}`;
    return [{ path: [...path, index], found: `is ${name}`, allowed }];
  });
}
