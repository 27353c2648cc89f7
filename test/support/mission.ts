/** A mission for tests: five invented vehicles on a 600 m ring, every field given. */
import type { Mission } from '../../messages/mission.ts';
import { defaultSettings } from '../../messages/settings.ts';

const NAMES = [
  'amber', 'cobalt', 'jade', 'ochre', 'umber', 'indigo', 'slate', 'coral',
  'russet', 'teal', 'sienna', 'pearl', 'basalt', 'saffron', 'walnut', 'flint',
];

/** The mission of vehicle `selfIndex` in a fleet of `fleetSize`, with some fields replaced. */
export function missionFor(selfIndex = 0, fleetSize = 5, change: Partial<Mission> = {}): Mission {
  return {
    vehicle: NAMES[selfIndex]!,
    fleet: NAMES.slice(0, fleetSize).map((name, slot) => ({ name, slot })),
    tick_s: 1,
    datum: { lat_deg: 58.4021, lon_deg: -9.531 },
    loop: { shape: 'circle', centre: { east_m: 0, north_m: 0 }, radius_m: 600, turn: 'clockwise' },
    offsets: Array.from({ length: fleetSize }, (_, index) => index / fleetSize),
    depth_m: 40,
    sharing: 'notes',
    keepIn: { shape: 'circle', centre: { east_m: 0, north_m: 0 }, radius_m: 2000 },
    keepOut: [],
    recovery: { east_m: -1500, north_m: 0 },
    self: {
      start: { east_m: -900, north_m: 150 - 90 * selfIndex, depth_m: 0, heading_deg: 40 },
      cruise_mps: 1.2, speedMin_mps: 0.5, speedMax_mps: 1.6, speedLag_s: 5, turnRate_degps: 5, climb_mps: 0.3,
      battery_J: 7.2e6, powerHotel_W: 30, powerCruise_W: 60,
      fixFrom: 'baseline', fixEvery_s: 300, fixSigma_m: 5,
      compassBiasSigma_deg: 1, compassSigma_deg: 0.5, logScaleSigma: 0.01, logSigma_mps: 0.02,
    },
    modem: { frame_bytes: 32, bitRate_bps: 640, slot_s: 4, turnOn_s: 0.2, guard_s: 0.05 },
    onboard: defaultSettings(),
    ...change,
  };
}
