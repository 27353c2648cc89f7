/**
 * `report.html`: the page a person reads first. One file, nothing fetched, no script; the verdict and
 * why, the limits, the water, time, the vehicles, and how to run it again.
 */
import { figure, span } from './figures.ts';
import { MEASURES, MEASURE_NAMES, type MeasureName, type VehicleMeasures } from './measures.ts';
import { exceptSentence, verdictSentence, worstWords } from './outcome.ts';
import { html, whole } from './report-html.ts';
import type { ReportInput } from './report-input.ts';
import { limitsSection } from './report-limits.ts';
import { markPicture } from './report-marks.ts';
import { HATCH, scriptTable } from './report-script.ts';
import { REPORT_STYLE } from './report-style.ts';
import { timeSection } from './report-time.ts';
import { waterSection } from './report-water.ts';

/** The whole page; the same input gives the same page. */
export function renderReport(input: ReportInput): string {
  return withOwnClips(page(input));
}

/** The plots count their clip paths over the life of the process; a page counts its own. */
function withOwnClips(text: string): string {
  const places = new Map<string, number>();
  return text.replace(/\bplot-clip-(\d+)/g, (_all, number: string) => {
    if (!places.has(number)) places.set(number, places.size + 1);
    return `clip-${places.get(number)}`;
  });
}

function page(input: ReportInput): string {
  const { outcome } = input;
  return (
    '<!doctype html>\n<html lang="en"><head><meta charset="utf-8">' +
    '<meta name="viewport" content="width=device-width, initial-scale=1">' +
    `<title>${html(`${outcome.title}: ${outcome.verdict}`)}</title>` +
    `<style>${REPORT_STYLE}</style></head>\n<body>` +
    `${HATCH}<header>${opening(input)}</header>\n` +
    `<section>${limitsSection(outcome)}</section>\n` +
    `<section class="long">${waterSection(input)}</section>\n` +
    `<section class="long">${timeSection(input)}</section>\n` +
    (input.trial.faults.length + input.trial.orders.length === 0
      ? ''
      : `<section>${scriptTable(input)}</section>\n`) +
    `<section class="long">${vehiclesSection(input)}</section>\n` +
    `<section>${measuresSection(input)}</section>\n` +
    `<section>${runSection(input)}</section>\n` +
    '<footer>A dry run is advice, not clearance to launch. ' +
    'This is no collision-avoidance or safety system.</footer>' +
    '</body></html>\n'
  );
}

function opening({ outcome, trial, report }: ReportInput): string {
  const fleet = report.vehicles.length;
  const formUp = report.values.formUp_s;
  const formed =
    formUp === null
      ? 'The fleet did not form up'
      : `The fleet formed up ${formUp === 0 ? 'at once' : `after ${span(formUp)}`}`;
  return (
    `<h1>${html(verdictSentence(outcome)).replace(/(\d) (?=(?:m|m\/s|%|s|min|h|Wh)\b)/g, '$1&nbsp;')}</h1>` +
    `<p>${html(trial.title)}, seed ${trial.seed}: ${fleet} vehicle${fleet === 1 ? '' : 's'}, ` +
    `${span(trial.duration)}, ` +
    `sharing <code>${trial.mission.sharing}</code>. ${formed}.</p>` +
    (outcome.except === undefined ? '' : `<p><b>${html(exceptSentence(outcome.except))}</b></p>`)
  );
}

const COLUMNS: readonly { readonly head: string; readonly of: (vehicle: VehicleMeasures) => string }[] = [
  { head: 'off the loop, rms', of: (one) => figure(one.crossTrackRms, 'm') },
  { head: 'greatest', of: (one) => figure(one.crossTrackMax, 'm') },
  { head: 'gap error, rms', of: (one) => figure(one.gapRms, '') },
  { head: 'current error, rms', of: (one) => figure(one.currentRms, 'm/s') },
  { head: 'map error, rms', of: (one) => figure(one.mapRms, 'm/s') },
  { head: 'position error, rms', of: (one) => figure(one.positionRms, 'm') },
  { head: 'frames said', of: (one) => String(one.framesSent) },
  { head: 'heard and used', of: (one) => figure(one.deliveryRatio, '') },
  { head: 'energy', of: (one) => figure(one.energy_Wh, 'Wh') },
  { head: 'charge left', of: (one) => figure(one.battery, '') },
];

function vehiclesSection({ report }: ReportInput): string {
  const heads = COLUMNS.map(({ head }) => `<th scope="col">${head}</th>`).join('');
  const rows = report.vehicles.map(
    (vehicle, index) =>
      `<tr><td>${markPicture(index)}${html(vehicle.vehicle)}` +
      `${vehicle.isExcepted ? ' (not counted)' : ''}</td>` +
      `${COLUMNS.map(({ of }) => `<td>${whole(of(vehicle))}</td>`).join('')}</tr>`,
  );
  return (
    `<h2>Vehicles</h2><div class="scroll"><table>` +
    `<thead><tr><th scope="col">vehicle</th>${heads}</tr></thead>` +
    `<tbody>${rows.join('')}</tbody></table></div>`
  );
}

function measuresSection({ report, outcome }: ReportInput): string {
  const { yardsticks } = outcome;
  const beside = (name: MeasureName, of: 'central' | 'known'): string =>
    yardsticks === undefined ? '' : `<td>${whole(figure(yardsticks[of][name] ?? null, MEASURES[name].unit))}</td>`;
  const heads =
    yardsticks === undefined ? '' : '<th scope="col">notes shared at once</th><th scope="col">current known</th>';
  const rows = MEASURE_NAMES.map((name) => {
    const value = report.values[name];
    return (
      `<tr><td><b>${name}</b> <span class="says">${html(MEASURES[name].says)}</span></td>` +
      `<td>${whole(figure(value, MEASURES[name].unit))}</td>` +
      beside(name, 'central') +
      beside(name, 'known') +
      `<td>${value === null ? '' : html(worstWords(report.worst[name]))}</td></tr>`
    );
  });
  return (
    '<h2>Measures</h2><div class="scroll"><table class="measures">' +
    '<thead><tr><th scope="col">measure</th><th scope="col">value</th>' +
    `${heads}<th scope="col">worst, or least</th></tr></thead><tbody>${rows.join('')}</tbody></table></div>`
  );
}

function runSection({ outcome, trial }: ReportInput): string {
  const facts: [string, string][] = [
    ['ticks', `${outcome.ticks} of ${trial.tick} s, in ${outcome.wall_s.toFixed(1)} s of wall time`],
    ['version', `drywake ${html(outcome.version)}, Node ${html(outcome.node)}`],
    ['digest', `<code>${outcome.digest}</code>`],
  ];
  if (trial.start !== undefined) facts.unshift(['start', html(trial.start)]);
  if (outcome.why !== undefined) facts.push(['run it again', `<code>${html(outcome.why.repeat)}</code>`]);
  const list = facts.map(([term, text]) => `<dt>${term}</dt><dd>${text}</dd>`).join('');
  return `<h2>This run</h2><dl class="facts">${list}</dl>`;
}
