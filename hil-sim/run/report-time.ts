/** Time: every error over the run, each vehicle with its mark, limits as lines, numbers in words below. */
import { clock, figure } from './figures.ts';
import { MEASURES, type MeasureName, type VehicleMeasures } from './measures.ts';
import { figureOf, html } from './report-html.ts';
import { markPicture } from './report-marks.ts';
import { deliveryPlot, linesPlot, type Lines } from './report-plots.ts';
import type { ReportInput } from './report-input.ts';

export function timeSection(input: ReportInput): string {
  const { report, trial } = input;
  const plots = [...errorPlots(input), ...statePlots(input)];
  const formUp = report.values.formUp_s;
  const since =
    formUp === null
      ? 'The fleet never formed up, so nothing counted.'
      : `Measures count from ${clock(formUp)}, where the fleet formed up.`;
  const legend = trial.fleet.vehicles
    .map((vehicle, index) => `<li>${markPicture(index)}${html(vehicle.name)}</li>`)
    .join('');
  return (
    '<h2>Time</h2>' +
    `<p class="says">Errors are the root mean square in each ${report.series.binS} s. ` +
    `${since} ` +
    'Where a line leaves a plot at the top, the approach went on above it.</p>' +
    `<ul class="legend">${legend}</ul><div class="pair">` +
    plots.map((lines) => figureOf(lines.heading, linesPlot(input, lines), lines.caption)).join('') +
    deliveryFigure(input) +
    '</div>'
  );
}

/** A level of a limit with its words; shares are drawn in percent. */
function level(limit: number | undefined, what: string, unit: string): { at: number; words: string }[] {
  if (limit === undefined) return [];
  return [{ at: unit === '' ? 100 * limit : limit, words: `${what}: at most ${figure(limit, unit)}` }];
}

function errorPlots(input: ReportInput): Lines[] {
  const { binned } = input.report.series;
  const { maps } = input.report;
  const { limits } = input.trial;
  return [
    {
      heading: 'Distance from the loop',
      label: 'm',
      values: binned.crossTrack,
      levels: [...level(limits.crossTrackRms, 'rms', 'm'), ...level(limits.crossTrackMax, 'greatest', 'm')],
      caption: `${rmsWords(input, 'crossTrackRms')}; greatest ${valueWords(input, 'crossTrackMax')}.`,
    },
    {
      heading: 'Gap error over target gap',
      label: '%',
      values: binned.gap,
      scale: 100,
      levels: level(limits.gapRms, 'rms', ''),
      caption: `${rmsWords(input, 'gapRms')}.`,
    },
    {
      heading: 'Error of the stated current',
      label: 'm/s',
      values: binned.current,
      levels: level(limits.currentRms, 'rms', 'm/s'),
      fleet: { values: maps.errorMps, stepS: 60 },
      caption:
        `At the own place: ${rmsWords(input, 'currentRms')}. Heavy line, maps round the whole loop: ` +
        `${rmsWords(input, 'mapRms')}; spread between maps ${valueWords(input, 'mapSpread')}.`,
    },
    {
      heading: 'Error of the stated position',
      label: 'm',
      values: binned.position,
      levels: level(limits.positionRms, 'rms', 'm'),
      caption: `${rmsWords(input, 'positionRms')}.`,
    },
  ];
}

function statePlots(input: ReportInput): Lines[] {
  const { report, trial } = input;
  const { sampled } = report.series;
  return [
    {
      heading: 'Depth',
      label: 'm below the surface',
      values: sampled.depth,
      reverse: true,
      isState: true,
      levels: [{ at: trial.mission.depth, words: 'depth of the loop' }],
      caption: `Closest to each other within 5 m of depth: ${valueWords(input, 'separationMin')}.`,
    },
    {
      heading: 'Charge left',
      label: '%',
      values: sampled.battery,
      scale: 100,
      domain: [0, 100],
      isState: true,
      caption:
        `Energy used by the fleet: ${figure(report.values.energy_Wh, 'Wh')}, ` +
        `most by ${html(report.worst.energy_Wh.vehicle!)}.`,
    },
  ];
}

function valueWords({ report }: ReportInput, name: MeasureName): string {
  const { vehicle, at_s, with: other } = report.worst[name];
  const who =
    vehicle === null || report.values[name] === null
      ? ''
      : ` (${html(other === undefined ? vehicle : `${vehicle} and ${other}`)}` +
        `${at_s === null ? '' : ` at ${clock(at_s)}`})`;
  return `${figure(report.values[name], MEASURES[name].unit)}${who}`;
}

/** The fleet's rms and the worst vehicle's own. */
function rmsWords({ report }: ReportInput, name: MeasureName & keyof VehicleMeasures): string {
  const { vehicle } = report.worst[name];
  const { unit } = MEASURES[name];
  const own = report.vehicles.find((one) => one.vehicle === vehicle)?.[name] ?? null;
  const fleet = `rms ${figure(report.values[name], unit)}`;
  return own === null ? fleet : `${fleet}, worst ${html(vehicle!)} ${figure(own, unit)}`;
}

function deliveryFigure(input: ReportInput): string {
  const said = figure(input.report.values.framesSent, 'frames');
  return figureOf(
    'Frames heard and used',
    deliveryPlot(input),
    `${said} said; heard and used ${valueWords(input, 'deliveryRatio')} of frames times hearers, ` +
      'repeats left out.',
  );
}
