/** From a checked trial to what the sea is told. */
import type { CurrentPlan, SeaPlan, VehiclePlan } from '../sea/plan.ts';
import { faultPlan, vehicleIndexes } from './fault-plan.ts';
import type { Trial, TrialCurrent } from './schema.ts';
import { fullVehicles, type FullVehicle } from './vehicles.ts';

export function seaPlan(trial: Trial): SeaPlan {
  const { modem, water } = trial;
  return {
    seed: trial.seed,
    tickS: trial.tick,
    vehicles: fullVehicles(trial).map(vehiclePlan),
    currents: water.currents.map(currentPlan),
    faults: trial.faults.map((fault) => faultPlan(trial, fault)),
    orders: trial.orders.map(({ at, vehicle, order }) => ({
      atS: at,
      vehicles: vehicleIndexes(trial, vehicle),
      order,
    })),
    modem: {
      frameBytes: modem.frame,
      bitRateBps: modem.bitRate,
      slotS: modem.slot,
      turnOnS: modem.turnOn,
      guardS: modem.guard,
      link: {
        loss: modem.link.loss,
        burst: modem.link.burst,
        delayS: modem.link.delay,
        jitterS: modem.link.jitter,
        repeat: modem.link.repeat,
        garble: modem.link.garble,
      },
    },
    water: { temperatureDegC: water.temperature, salinityPsu: water.salinity, depthM: water.bottom },
  };
}

const TURN = 2 * Math.PI;

/** A heading from −1 turn to 1 turn, as the same one in [0, 2π). */
function headingRad(angleRad: number): number {
  const wrapped = ((angleRad % TURN) + TURN) % TURN;
  return wrapped < TURN ? wrapped : 0;
}

function vehiclePlan(vehicle: FullVehicle): VehiclePlan {
  return {
    name: vehicle.name,
    startEastM: vehicle.start.east,
    startNorthM: vehicle.start.north,
    startDepthM: vehicle.start.depth,
    startHeadingRad: headingRad(vehicle.start.heading),
    cruiseMps: vehicle.speed.cruise,
    speedMinMps: vehicle.speed.min,
    speedMaxMps: vehicle.speed.max,
    speedLagS: vehicle.speed.lag,
    turnRateRadps: vehicle.turnRate,
    climbMps: vehicle.climb,
    batteryJ: vehicle.battery,
    powerHotelW: vehicle.power.hotel,
    powerCruiseW: vehicle.power.cruise,
    clockOffsetS: vehicle.clock.offset,
    clockDriftRatio: vehicle.clock.drift,
    fixFrom: vehicle.fix.from,
    fixEveryS: vehicle.fix.every,
    fixSigmaM: vehicle.fix.sigma,
    fixLatencyS: vehicle.fix.latency,
    fixOutlierShare: vehicle.fix.outlier.share,
    fixOutlierSigmaM: vehicle.fix.outlier.sigma,
    compassBiasSigmaRad: vehicle.compass.bias,
    compassBiasRad: vehicle.compass.biasIs ?? null,
    compassSigmaRad: vehicle.compass.sigma,
    logScaleSigma: vehicle.log.scale,
    logScale: vehicle.log.scaleIs ?? null,
    logSigmaMps: vehicle.log.sigma,
  };
}

function currentPlan(current: TrialCurrent): CurrentPlan {
  switch (current.kind) {
    case 'uniform':
      return { kind: 'uniform', setRad: current.set, driftMps: current.drift };
    case 'tide':
      return {
        kind: 'tide',
        periodS: current.period,
        majorMps: current.major,
        minorMps: current.minor,
        bearingRad: current.bearing,
        phaseRad: current.phase,
      };
    case 'eddy':
      return {
        kind: 'eddy',
        centreEastM: current.centre.east,
        centreNorthM: current.centre.north,
        radiusM: current.radius,
        peakMps: current.peak,
        turn: current.turn,
        movingSetRad: current.moving?.set ?? 0,
        movingDriftMps: current.moving?.drift ?? 0,
      };
    case 'shear':
      return { kind: 'shear', bearingRad: current.bearing, gradientPerS: current.gradient / current.over };
  }
}
