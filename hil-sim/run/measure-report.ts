/** What a run's measures came to: every value, where each is at its worst, each vehicle, time series. */
import type { Measures } from './measure.ts';
import { measuredFromS } from './measure.ts';
import type { Maps } from './maps.ts';
import type { MeasureValues, VehicleMeasures, WorstPlaces } from './measures.ts';
import { finishSeries, type Series } from './series.ts';
import {
  NOWHERE,
  greatestOf,
  greatestOfVehicle,
  rmsOf,
  rmsOfVehicle,
  worstBy,
  type Tally,
  type Worst,
} from './tally.ts';
import type { Track } from './track.ts';

const J_PER_WH = 3600;

export interface MeasureReport {
  readonly values: MeasureValues;
  readonly worst: WorstPlaces;
  /** First time at which a limit on a greatest or least value broke; null if it never did. */
  readonly breach: { readonly crossTrackMax: number | null; readonly separationMin: number | null };
  readonly vehicles: readonly VehicleMeasures[];
  readonly excepted: readonly string[];
  readonly ticks: number;
  readonly lastS: number;
  readonly series: Series;
  readonly maps: Maps;
  readonly track: Track;
}

/** Closes the measures; call once, after the last tick. */
export function finishMeasures(m: Measures): MeasureReport {
  finishSeries(m.series);
  const { tallies } = m;
  const formUp = measuredFromS(m);
  const since = (value: number | null): number | null => (formUp === null ? null : value);
  const { offered, heard, framesSent } = m.hearings;
  const offeredSum = sum(offered);
  return {
    values: {
      formUp_s: formUp,
      crossTrackRms: since(rmsOf(tallies.crossTrack)),
      crossTrackMax: since(greatestOf(tallies.crossTrack)),
      gapRms: since(rmsOf(tallies.gap)),
      separationMin: m.separationPair[0]! < 0 ? null : Math.sqrt(m.separation[0]!),
      currentRms: since(rmsOf(tallies.current)),
      mapRms: since(rmsOf(tallies.mapError)),
      mapSpread: since(rmsOf(tallies.mapSpread)),
      positionRms: since(rmsOf(tallies.position)),
      deliveryRatio: offeredSum === 0 ? null : sum(heard) / offeredSum,
      framesSent: sum(framesSent),
      energy_Wh: sum(m.energyJ) / J_PER_WH,
      lateTicks: sum(m.lateTicks),
    },
    worst: worstPlaces(m, formUp),
    breach: {
      crossTrackMax: formUp === null ? null : orNull(m.breachS[0]!),
      separationMin: orNull(m.breachS[1]!),
    },
    vehicles: m.names.map((_name, index) => vehicleMeasures(m, index, formUp !== null)),
    excepted: m.names.filter((name) => m.except.includes(name)),
    ticks: m.progress[0]!,
    lastS: m.progress[1]!,
    series: m.series,
    maps: m.maps,
    track: m.track,
  };
}

function sum(values: Float64Array): number {
  let total = 0;
  for (const value of values) total += value;
  return total;
}

function orNull(value: number): number | null {
  return Number.isNaN(value) ? null : value;
}

function worstPlaces(m: Measures, formUp: number | null): WorstPlaces {
  const { tallies, names } = m;
  const since = (worst: Worst): Worst => (formUp === null ? lastOut(m) : worst);
  const ofRms = (tally: Tally): Worst => since(worstBy(tally, names, rmsOfVehicle));
  const [one, other] = m.separationPair;
  return {
    formUp_s: lastOut(m),
    crossTrackRms: ofRms(tallies.crossTrack),
    crossTrackMax: since(worstBy(tallies.crossTrack, names, greatestOfVehicle)),
    gapRms: ofRms(tallies.gap),
    separationMin:
      one! < 0 ? NOWHERE : { vehicle: names[one!]!, at_s: m.separation[1]!, with: names[other!]! },
    currentRms: ofRms(tallies.current),
    mapRms: ofRms(tallies.mapError),
    mapSpread: ofRms(tallies.mapSpread),
    positionRms: ofRms(tallies.position),
    deliveryRatio: leastDelivered(m),
    framesSent: NOWHERE,
    energy_Wh: { vehicle: names[indexOfGreatest(m.energyJ)]!, at_s: null },
    lateTicks:
      sum(m.lateTicks) === 0 ? NOWHERE : { vehicle: names[indexOfGreatest(m.lateTicks)]!, at_s: null },
  };
}

/** The last vehicle that kept the fleet from being formed up. */
function lastOut(m: Measures): Worst {
  const index = m.formed.marks[1]!;
  return index < 0 ? NOWHERE : { vehicle: m.names[index]!, at_s: m.formed.timesS[1]! };
}

function leastDelivered(m: Measures): Worst {
  const { offered, heard } = m.hearings;
  let least = -1;
  for (let index = 0; index < offered.length; index++) {
    if (offered[index] === 0) continue;
    if (least < 0 || heard[index]! * offered[least]! < heard[least]! * offered[index]!) least = index;
  }
  return least < 0 ? NOWHERE : { vehicle: m.names[least]!, at_s: null };
}

function indexOfGreatest(values: Float64Array): number {
  let greatest = 0;
  for (let index = 1; index < values.length; index++)
    if (values[index]! > values[greatest]!) greatest = index;
  return greatest;
}

function vehicleMeasures(m: Measures, index: number, isFormedUp: boolean): VehicleMeasures {
  const { tallies, hearings } = m;
  const since = (value: number | null): number | null => (isFormedUp ? value : null);
  return {
    vehicle: m.names[index]!,
    isExcepted: m.except.includes(m.names[index]!),
    crossTrackRms: since(rmsOfVehicle(tallies.crossTrack, index)),
    crossTrackMax: since(greatestOfVehicle(tallies.crossTrack, index)),
    gapRms: since(rmsOfVehicle(tallies.gap, index)),
    currentRms: since(rmsOfVehicle(tallies.current, index)),
    mapRms: since(rmsOfVehicle(tallies.mapError, index)),
    positionRms: since(rmsOfVehicle(tallies.position, index)),
    deliveryRatio: hearings.offered[index] === 0 ? null : hearings.heard[index]! / hearings.offered[index]!,
    framesSent: hearings.framesSent[index]!,
    energy_Wh: m.energyJ[index]! / J_PER_WH,
    battery: m.battery[index]!,
  };
}
