/** From a checked trial to what each agent is told: one mission per vehicle, in fleet order. */
import { degFromRad, headingDegFromRad } from '../../messages/angles.ts';
import type { Mission, SelfMessage } from '../../messages/mission.ts';
import {
  SETTINGS, settingName, type Setting, type SettingKey, type Settings,
} from '../../messages/settings.ts';
import type { AreaMessage, LoopMessage } from '../../messages/shape.ts';
import type { Trial } from './schema.ts';
import { fullVehicles, type FullVehicle } from './vehicles.ts';

export function missionsOf(trial: Trial): Mission[] {
  const { mission, modem } = trial;
  const vehicles = fullVehicles(trial);
  return vehicles.map((vehicle) => ({
    vehicle: vehicle.name,
    fleet: vehicles.map(({ name }, slot) => ({ name, slot })),
    tick_s: trial.tick,
    datum: { lat_deg: trial.datum.lat, lon_deg: trial.datum.lon },
    loop: loopMessage(mission.loop),
    offsets: offsetsOf(trial),
    depth_m: mission.depth,
    sharing: mission.sharing,
    keepIn: areaMessage(mission.keepIn),
    keepOut: mission.keepOut.map(areaMessage),
    recovery: { east_m: mission.recovery.east, north_m: mission.recovery.north },
    self: selfMessage(vehicle),
    modem: {
      frame_bytes: modem.frame,
      bitRate_bps: modem.bitRate,
      slot_s: modem.slot,
      turnOn_s: modem.turnOn,
      guard_s: modem.guard,
    },
    onboard: settingsMessage(trial),
  }));
}

/** Places in the pattern, turns ahead of the first: even, or as the mission lists them. */
export function offsetsOf(trial: Trial): number[] {
  const count = trial.fleet.vehicles.length;
  return trial.mission.spacing === 'even'
    ? Array.from({ length: count }, (_, index) => index / count)
    : [...trial.mission.spacing];
}

function areaMessage(area: Trial['mission']['keepIn']): AreaMessage {
  const centre = { east_m: area.centre.east, north_m: area.centre.north };
  return { shape: 'circle', centre, radius_m: area.radius };
}

function loopMessage(loop: Trial['mission']['loop']): LoopMessage {
  return { ...areaMessage(loop), turn: loop.turn };
}

function selfMessage(vehicle: FullVehicle): SelfMessage {
  return {
    start: {
      east_m: vehicle.start.east,
      north_m: vehicle.start.north,
      depth_m: vehicle.start.depth,
      heading_deg: headingDegFromRad(vehicle.start.heading),
    },
    cruise_mps: vehicle.speed.cruise,
    speedMin_mps: vehicle.speed.min,
    speedMax_mps: vehicle.speed.max,
    speedLag_s: vehicle.speed.lag,
    turnRate_degps: degFromRad(vehicle.turnRate),
    climb_mps: vehicle.climb,
    battery_J: vehicle.battery,
    powerHotel_W: vehicle.power.hotel,
    powerCruise_W: vehicle.power.cruise,
    fixFrom: vehicle.fix.from,
    fixEvery_s: vehicle.fix.every,
    fixSigma_m: vehicle.fix.sigma,
    compassBiasSigma_deg: degFromRad(vehicle.compass.bias),
    compassSigma_deg: degFromRad(vehicle.compass.sigma),
    logScaleSigma: vehicle.log.scale,
    logSigma_mps: vehicle.log.sigma,
  };
}

/** The trial's `onboard` section under message names; angles in degrees, absent ones at their default. */
function settingsMessage(trial: Trial): Settings {
  const given = trial.onboard as Record<string, number | undefined>;
  const values: Record<string, number> = {};
  for (const key of Object.keys(SETTINGS) as SettingKey[]) {
    const setting: Setting = SETTINGS[key];
    const value = given[key];
    values[settingName(key)] = value === undefined
      ? setting.default
      : setting.unit === 'deg' ? degFromRad(value) : value;
  }
  return values as Settings;
}
