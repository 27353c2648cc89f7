/**
 * What the sea and the agents are told: every value by its name and in its unit. The trial gives each
 * key a value of its own, so that one in the place of another shows; SI values are worked out by hand.
 */
import fc from 'fast-check';
import { afterAll, describe, expect, it } from 'vitest';
import { loadTrial } from '../../../hil-sim/trial/load.ts';
import { missionsOf } from '../../../hil-sim/trial/missions.ts';
import { seaPlan } from '../../../hil-sim/trial/plan.ts';
import { missionSchema } from '../../../messages/mission.ts';
import { defaultSettings } from '../../../messages/settings.ts';
import { TrialFolder } from '../../support/trial-text.ts';

const folder = new TrialFolder();
afterAll(() => folder.remove());

const FULL = `title: Every key
seed: 77
duration: 1 h
tick: 0.5 s
datum: { lat: 58.4, lon: -9.5 }
mission:
  loop: { shape: circle, centre: { east: 10 m, north: 20 m }, radius: 300 m, turn: anticlockwise }
  spacing: [0.1, 0.6]
  depth: 35 m
  sharing: solo
  keepIn: { shape: circle, centre: { east: 30 m, north: 40 m }, radius: 1 km }
  keepOut: [{ shape: circle, centre: { east: 500 m, north: 600 m }, radius: 70 m }]
  recovery: { east: -600 m, north: 50 m }
fleet:
  vehicles:
    - { name: amber, start: { east: 1 m, north: 301 m, depth: 2 m, heading: -90 deg } }
    - name: cobalt
      start: { east: 3 m, north: -299 m, heading: 360 deg }
      battery: 1 kWh
      speed: { max: 2 m/s }
      clock: { drift: 20 ppm }
      fix: { from: surface, outlier: { share: 3 % } }
      compass: { biasIs: -180 deg }
      log: { scaleIs: -5 % }
  each:
    speed: { cruise: 1.1 m/s, min: 0.4 m/s, max: 1.5 m/s, lag: 6 s }
    turnRate: 180 deg/s
    climb: 0.25 m/s
    battery: 3 kWh
    power: { hotel: 31 W, cruise: 61 W }
    clock: { offset: 250 ms, drift: 10 ppm }
    fix: { every: 4 min, sigma: 7 m, latency: 2 s, outlier: { share: 2 %, sigma: 55 m } }
    compass: { bias: 90 deg, sigma: 45 deg }
    log: { scale: 4 %, sigma: 3 cm/s }
onboard: { converge: 25 m, fixGate: 7, batteryReserve: 20 % }
water:
  currents:
    - { kind: uniform, set: 180 deg, drift: 36 km/h }
    - { kind: tide, period: 12 h, major: 25 cm/s, minor: -5 cm/s, bearing: 90 deg, phase: 45 deg }
    - { kind: eddy, centre: { east: 7 m, north: 8 m }, radius: 9 m, peak: 11 cm/s, turn: clockwise }
    - kind: eddy
      centre: { east: 7 m, north: 8 m }
      radius: 9 m
      peak: 12 cm/s
      turn: anticlockwise
      moving: { set: 90 deg, drift: 2 cm/s }
    - { kind: shear, bearing: 90 deg, gradient: 10 cm/s, over: 1 km }
  temperature: 9 degC
  salinity: 35.2
  bottom: 180 m
modem:
  bitRate: 0.32 kbit/s
  slot: 5 s
  turnOn: 300 ms
  guard: 60 ms
  link: { loss: 11 %, burst: 3, delay: 1.5 s, jitter: 0.25 s, repeat: 12 %, garble: 13 % }
faults:
  - { at: 1 min, for: 30 s, kind: link, from: amber, loss: 60 %, delay: 2 s }
  - { at: 2 min, kind: compass, vehicle: [cobalt], drift: 64800 deg/h }
  - { at: 3 min, for: 1 min, kind: log, step: 5 % }
  - { at: 4 min, kind: fix, vehicle: amber, outliers: 10 %, outlierSigma: 80 m }
  - { at: 5 min, for: 90 s, kind: reboot, vehicle: cobalt, memory: kept }
  - { at: 6 min, kind: current, set: 90 deg, drift: 10 cm/s }
  - { at: 7 min, kind: fix, jump: { east: 5 m, north: -6 m } }
orders:
  - { at: 55 min, vehicle: all, order: home }
  - { at: 56 min, vehicle: cobalt, order: surface }
`;

/** A fleet so fast in the currents of `FULL` is none; here only the names and units count. */
const sets = ['water.currents.0.drift=0.36 km/h'];
const HALF_TURN = 3.141592653589793;
const QUARTER = 1.5707963267948966;

describe('seaPlan', () => {
  const plan = seaPlan(folder.trial(FULL, sets));

  it('tells the sea its seed, tick, modem and water', () => {
    const { seed, tickS, modem, water } = plan;
    expect({ seed, tickS, modem, water }).toEqual({
      seed: 77,
      tickS: 0.5,
      modem: {
        frameBytes: 32, bitRateBps: 320, slotS: 5, turnOnS: 0.3, guardS: 0.06,
        link: { loss: 0.11, burst: 3, delayS: 1.5, jitterS: 0.25, repeat: 0.12, garble: 0.13 },
      },
      water: { temperatureDegC: 9, salinityPsu: 35.2, depthM: 180 },
    });
  });

  const amber = {
    name: 'amber',
    startEastM: 1, startNorthM: 301, startDepthM: 2, startHeadingRad: HALF_TURN + QUARTER,
    cruiseMps: 1.1, speedMinMps: 0.4, speedMaxMps: 1.5, speedLagS: 6,
    turnRateRadps: HALF_TURN, climbMps: 0.25,
    batteryJ: 10_800_000, powerHotelW: 31, powerCruiseW: 61,
    clockOffsetS: 0.25, clockDriftRatio: 0.00001,
    fixFrom: 'baseline', fixEveryS: 240, fixSigmaM: 7, fixLatencyS: 2, fixOutlierShare: 0.02, fixOutlierSigmaM: 55,
    compassBiasSigmaRad: QUARTER, compassBiasRad: null, compassSigmaRad: QUARTER / 2,
    logScaleSigma: 0.04, logScale: null, logSigmaMps: 0.03,
  };

  it('tells it each vehicle, its own keys over those of all', () => {
    expect(plan.vehicles).toEqual([amber, {
      ...amber,
      name: 'cobalt',
      startEastM: 3, startNorthM: -299, startDepthM: 0, startHeadingRad: 0,
      speedMaxMps: 2, batteryJ: 3_600_000, clockDriftRatio: 0.00002, fixFrom: 'surface', fixOutlierShare: 0.03,
      compassBiasRad: -HALF_TURN, logScale: -0.05,
    }]);
  });

  it('tells it headings from 0 up to a turn, however they are written', () => {
    for (const heading of ['-360 deg', '360 deg', '0 deg', '-1e-16 rad', '359.99999 deg', '-0.1 deg']) {
      const trial = folder.trial(FULL, [...sets, `fleet.vehicles.amber.start.heading=${heading}`]);
      const { startHeadingRad } = seaPlan(trial).vehicles[0]!;
      expect(startHeadingRad >= 0 && startHeadingRad < 2 * Math.PI).toBe(true);
    }
  });

  it('tells it the currents', () => {
    const eddy = { kind: 'eddy', centreEastM: 7, centreNorthM: 8, radiusM: 9 };
    expect(plan.currents).toEqual([
      { kind: 'uniform', setRad: HALF_TURN, driftMps: expect.closeTo(0.1, 15) as number },
      {
        kind: 'tide', periodS: 43_200, majorMps: 0.25, minorMps: -0.05, bearingRad: QUARTER, phaseRad: QUARTER / 2,
      },
      { ...eddy, peakMps: 0.11, turn: 'clockwise', movingSetRad: 0, movingDriftMps: 0 },
      { ...eddy, peakMps: 0.12, turn: 'anticlockwise', movingSetRad: QUARTER, movingDriftMps: 0.02 },
      { kind: 'shear', bearingRad: QUARTER, gradientPerS: 0.0001 },
    ]);
  });

  it('tells it faults and orders, by place in the fleet', () => {
    expect(plan.faults).toEqual([
      { kind: 'link', atS: 60, untilS: 90, from: [0], to: [0, 1], change: { loss: 0.6, delayS: 2 } },
      // 64800 deg/h is 18 deg/s.
      {
        kind: 'compass', atS: 120, untilS: Infinity, vehicles: [1], how: 'drift',
        amount: expect.closeTo(HALF_TURN / 10, 15) as number,
      },
      { kind: 'log', atS: 180, untilS: 240, vehicles: [0, 1], how: 'step', amount: 0.05 },
      {
        kind: 'fix', atS: 240, untilS: Infinity, vehicles: [0], upset: { how: 'outliers', share: 0.1, sigmaM: 80 },
      },
      { kind: 'reboot', atS: 300, untilS: 390, vehicles: [1], memory: 'kept' },
      {
        kind: 'current', atS: 360, untilS: Infinity,
        current: { kind: 'uniform', setRad: QUARTER, driftMps: 0.1 },
      },
      {
        kind: 'fix', atS: 420, untilS: Infinity, vehicles: [0, 1], upset: { how: 'jump', eastM: 5, northM: -6 },
      },
    ]);
    expect(plan.orders).toEqual([
      { atS: 3300, vehicles: [0, 1], order: 'home' },
      { atS: 3360, vehicles: [1], order: 'surface' },
    ]);
  });
});

describe('missionsOf', () => {
  const missions = missionsOf(folder.trial(FULL, sets));

  it('tells each agent its mission, its fleet and itself', () => {
    expect(missions.map(({ vehicle }) => vehicle)).toEqual(['amber', 'cobalt']);
    const { vehicle, onboard, ...mission } = missions[1]!;
    expect(vehicle).toBe('cobalt');
    expect(mission).toEqual({
      fleet: [{ name: 'amber', slot: 0 }, { name: 'cobalt', slot: 1 }],
      tick_s: 0.5,
      datum: { lat_deg: 58.4, lon_deg: -9.5 },
      loop: { shape: 'circle', centre: { east_m: 10, north_m: 20 }, radius_m: 300, turn: 'anticlockwise' },
      offsets: [0.1, 0.6],
      depth_m: 35,
      sharing: 'solo',
      keepIn: { shape: 'circle', centre: { east_m: 30, north_m: 40 }, radius_m: 1000 },
      keepOut: [{ shape: 'circle', centre: { east_m: 500, north_m: 600 }, radius_m: 70 }],
      recovery: { east_m: -600, north_m: 50 },
      self: {
        start: { east_m: 3, north_m: -299, depth_m: 0, heading_deg: 0 },
        cruise_mps: 1.1, speedMin_mps: 0.4, speedMax_mps: 2, speedLag_s: 6,
        turnRate_degps: 180, climb_mps: 0.25,
        battery_J: 3_600_000, powerHotel_W: 31, powerCruise_W: 61,
        fixFrom: 'surface', fixEvery_s: 240, fixSigma_m: 7,
        compassBiasSigma_deg: 90, compassSigma_deg: 45, logScaleSigma: 0.04, logSigma_mps: 0.03,
      },
      modem: { frame_bytes: 32, bitRate_bps: 320, slot_s: 5, turnOn_s: 0.3, guard_s: 0.06 },
    });
    expect(onboard).toEqual({ ...defaultSettings(), converge_m: 25, fixGate: 7, batteryReserve: 0.2 });
  });

  it('tells nothing of water, faults, orders, limits, nor of what a sensor’s error really is', () => {
    const words = /current|tide"|eddy|loss|limit|fault|outage|biasIs|scaleIs|-180|0\.05|drift/i;
    for (const { onboard: _settings, ...mission } of missions) expect(JSON.stringify(mission)).not.toMatch(words);
  });

  it('spreads a fleet evenly by default', () => {
    const trial = loadTrial('configs/trials/marrow-bank.yaml');
    expect(trial.ok && missionsOf(trial.trial)[3]!.offsets).toEqual([0, 0.2, 0.4, 0.6, 0.8]);
  });

  it('makes valid missions of whatever trial is taken, however extreme', () => {
    const extremes: [string, string[]][] = [
      ['fleet.each.speed', ['{ cruise: 20 m/s, max: 20 m/s, lag: 600 s }', '{ cruise: 0.5 m/s, min: 0 m/s }']],
      ['fleet.each.climb', ['10 m/s', '1e-9 m/s']],
      ['fleet.each.battery', ['1e10 J', '5400 J']],
      ['fleet.each.fix', ['{ every: 1e6 s, sigma: 1e4 m }', '{ every: 0.5 s, sigma: 1e-9 m, latency: 0 s }']],
      ['fleet.each.clock', ['{ offset: -1 h, drift: -1000 ppm }']],
      ['fleet.each.compass', ['{ bias: 180 deg, sigma: 180 deg }', '{ bias: -1 deg }', '{ biasIs: -360 deg }']],
      ['fleet.each.log', ['{ scale: 100 %, sigma: 50 m/s }']],
      ['fleet.vehicles.amber.start.heading', ['359.9999999999999 deg', '-0.00000000000001 deg', '-360 deg']],
      ['mission.loop.radius', ['970 m', '1 m']],
      ['mission.depth', ['0 m', '6000 m']],
      ['water.bottom', ['1000 km']],
      ['datum', ['{ lat: -89, lon: 180 }', '{ lat: 89, lon: -180 }']],
      ['modem', ['{ slot: 600 s, turnOn: 60 s, guard: 60 s, bitRate: 1e6 bit/s }']],
      ['tick', ['10 s', '1 ms']],
    ];
    const draw = fc.tuple(...extremes.map(([path, values]) =>
      fc.option(fc.constantFrom(...values).map((value) => `${path}=${value}`))));
    let taken = 0;
    fc.assert(fc.property(draw, (drawn) => {
      const path = folder.write('trial.yaml', FULL);
      const loaded = loadTrial(path, { sets: [...sets, ...drawn.filter((set) => set !== null)] });
      if (!loaded.ok) return;
      taken += 1;
      for (const mission of missionsOf(loaded.trial)) expect(missionSchema.safeParse(mission).error).toBeUndefined();
    }), { numRuns: 200 });
    expect(taken).toBeGreaterThan(10);
  });
});
