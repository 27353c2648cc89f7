/** A whole synthetic run for the report: five vehicles join the ring, then go round it a little off. */
import type { TickRecord } from '../../hil-sim/run/record.ts';
import type { Hearing } from '../../hil-sim/sea/sea.ts';
import type { Trial } from '../../hil-sim/trial/schema.ts';
import { flatMap, onRing, recordOf, type Moment } from './synthetic-run.ts';

const JOIN_S = 2400;
const TURNS_PER_S = 1.2 / (2 * Math.PI * 600);

/** Water that turns with a tide and bends a little in space. */
export function tidalWater(eastM: number, northM: number, timeS: number, out: Float64Array): void {
  const angle = (2 * Math.PI * timeS) / 44_714;
  out[0] = 0.12 + 0.2 * Math.cos(angle) + northM / 12_000;
  out[1] = 0.05 + 0.15 * Math.sin(angle) - eastM / 15_000;
}

/** The record of one tick of the run. */
export function fleetRecord(trial: Trial, tick: number): TickRecord {
  const timeS = tick * trial.tick;
  const count = trial.fleet.vehicles.length;
  const water = new Float64Array(2);
  const moments = trial.fleet.vehicles.map((vehicle, index): Moment => {
    const joined = Math.min(1, timeS / (JOIN_S + 120 * index));
    const wobbleM = 9 * Math.sin(timeS / (170 + 13 * index)) + 4 * Math.sin(timeS / 61 + index);
    const phase = (index / count + timeS * TURNS_PER_S + 0.008 * Math.sin(timeS / 900 + 2 * index)) % 1;
    const ring = onRing(600 + wobbleM, phase);
    const eastM = vehicle.start.east + (ring.eastM - vehicle.start.east) * joined ** 2;
    const northM = vehicle.start.north + (ring.northM - vehicle.start.north) * joined ** 2;
    tidalWater(eastM, northM, timeS, water);
    const learned = Math.exp(-timeS / 3000);
    const off = 0.02 + 0.15 * learned;
    return {
      eastM,
      northM,
      depthM: Math.min(40, 0.3 * timeS),
      headingRad: 2 * Math.PI * phase,
      current: [water[0]!, water[1]!],
      believedCurrent: [
        water[0]! + off * Math.sin(timeS / 400 + index),
        water[1]! + off * Math.cos(timeS / 500 + index),
      ],
      believedOff: [6 * Math.sin(timeS / 150 + index), 6 * Math.cos(timeS / 210 + index)],
      energyJ: (85 + 2 * index) * timeS,
      battery: 1 - ((85 + 2 * index) * timeS) / 7.2e6,
      state: joined < 1 ? 'joining' : 'holding',
      map: timeS % 60 === 0 ? mapOf(timeS, off, index) : null,
    };
  });
  return recordOf(tick, moments, { tickS: trial.tick, hearings: hearingsOf(timeS, count) });
}

function mapOf(timeS: number, off: number, index: number): ReturnType<typeof flatMap> {
  const water = new Float64Array(2);
  const map = flatMap(0, 0, off);
  for (let point = 0; point < 64; point++) {
    const place = onRing(600, point / 64);
    tidalWater(place.eastM, place.northM, timeS, water);
    map.east_mps[point] = water[0]! + off * Math.sin(point / 9 + index / 4);
    map.north_mps[point] = water[1]! + off * Math.cos(point / 11 + index / 4);
  }
  return map;
}

/** A frame every 4 s, in turn; of six about one is lost. */
function hearingsOf(timeS: number, count: number): Hearing[] {
  if (timeS % 4 !== 0) return [];
  const fromIndex = (timeS / 4) % count;
  return Array.from({ length: count }, (_, toIndex) => toIndex)
    .filter((toIndex) => toIndex !== fromIndex)
    .map((toIndex): Hearing => {
      const isLost = (Math.floor(timeS / 4) * 7 + toIndex * 3) % 6 === 0;
      return {
        sentS: timeS,
        heardS: isLost ? null : timeS + 1.4,
        fromIndex,
        toIndex,
        bytes: 32,
        fate: isLost ? 'lost' : 'heard',
      };
    });
}
