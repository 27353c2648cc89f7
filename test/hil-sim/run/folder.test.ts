/** The run folder: fixed names and columns, and a log that can be read however its run ended. */
import {
  closeSync,
  mkdirSync,
  mkdtempSync,
  openSync,
  readFileSync,
  readdirSync,
  rmSync,
  truncateSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { gunzipSync } from 'node:zlib';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { FolderProblem, openRunFolder } from '../../../hil-sim/run/folder.ts';
import { LogWriter, readLog, type LogLine, type LogStart, type LogTick } from '../../../hil-sim/run/log.ts';
import { finishMeasures } from '../../../hil-sim/run/measure-report.ts';
import { startMeasures, takeTick } from '../../../hil-sim/run/measure.ts';
import { buildOutcome, outcomeSchema } from '../../../hil-sim/run/outcome.ts';
import type { Hearing } from '../../../hil-sim/sea/sea.ts';
import { missionSchema } from '../../../messages/mission.ts';
import { senseSchema } from '../../../messages/sense.ts';
import { steerSchema } from '../../../messages/steer.ts';
import { onRing, recordOf, still, trialOf } from '../../support/synthetic-run.ts';

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'drywake-folder-'));
});
afterEach(() => {
  rmSync(folder, { recursive: true, force: true });
});

const trial = trialOf(2, {
  limits: { crossTrackRms: '25 m' },
  mission: {
    loop: { shape: 'circle', centre: { east: '0 m', north: '0 m' }, radius: '600 m', turn: 'clockwise' },
    keepIn: { shape: 'circle', centre: { east: '0 m', north: '0 m' }, radius: '2000 m' },
    recovery: { east: '-1500 m', north: '0 m' },
  },
});

const heard: Hearing = { sentS: 12.25, heardS: 13.6789, fromIndex: 0, toIndex: 1, bytes: 32, fate: 'heard' };
const lost: Hearing = { sentS: 16, heardS: null, fromIndex: 1, toIndex: 0, bytes: 32, fate: 'lost' };

function recordAt(tick: number) {
  return recordOf(
    tick,
    [
      {
        ...onRing(610, 0.25),
        depthM: 40,
        headingRad: Math.PI,
        speedMps: 1.25,
        current: [0.1, -0.2],
        believedCurrent: [0.125, -0.25],
        believedOff: [3, 4],
        battery: 0.875,
        state: 'holding',
      },
      { ...onRing(600, 0.999999), headingRad: 2 * Math.PI - 1e-9, state: 'joining' },
    ],
    { hearings: tick === 14 ? [heard] : tick === 17 ? [lost] : [] },
  );
}

async function wholeRun(path: string, ticks: number): Promise<void> {
  const run = openRunFolder(path, trial, 'title: a trial\n');
  const measures = startMeasures(trial, still);
  for (let tick = 0; tick < ticks; tick++) {
    takeTick(measures, recordAt(tick));
    run.take(recordAt(tick));
  }
  const report = finishMeasures(measures);
  await run.close(
    buildOutcome({
      trial,
      report,
      digest: 'a'.repeat(64),
      ticks,
      wall_s: 0.5,
      version: '0.1.0',
      node: 'v20',
      repeat: 'npx drywake bench x.yaml',
    }),
    '<!doctype html>',
  );
}

async function linesOf(path: string): Promise<LogLine[]> {
  const lines: LogLine[] = [];
  for await (const line of readLog(path)) lines.push(line);
  return lines;
}

const read = (name: string): string => readFileSync(join(folder, 'run', name), 'utf8');

describe('the run folder', () => {
  beforeEach(async () => {
    await wholeRun(join(folder, 'run'), 31);
  });

  it('holds the names that tools outside rely on', () => {
    expect(readdirSync(join(folder, 'run')).sort()).toEqual([
      'frames.csv',
      'junit.xml',
      'log.ndjson.gz',
      'outcome.json',
      'report.html',
      'tracks.csv',
      'trial.yaml',
    ]);
    expect(read('trial.yaml')).toBe('title: a trial\n');
    expect(outcomeSchema.parse(JSON.parse(read('outcome.json'))).verdict).toBe('fail');
  });

  it('has tracks of one row per vehicle per ten seconds, in the columns of DESIGN section 6', () => {
    const rows = read('tracks.csv').split('\n');
    expect(rows[0]).toBe(
      't_s,vehicle,state,east_m,north_m,depth_m,heading_deg,speed_mps,current_east_mps,current_north_mps,' +
        'est_east_m,est_north_m,est_current_east_mps,est_current_north_mps,phase,est_phase,battery_pct',
    );
    expect(rows).toHaveLength(1 + 4 * 2 + 1);
    expect(rows[3]).toBe(
      '10,amber,holding,610.00,0.00,40.00,180.00,1.250,0.1000,-0.2000,613.00,4.00,0.1250,-0.2500,' +
        '0.25000,0.12346,87.50',
    );
    // A heading that rounds to 360 is 0, and a phase that rounds to a whole turn is 0.
    expect(rows[4]).toBe(
      '10,cobalt,joining,0.00,600.00,40.00,0.00,1.200,0.0000,0.0000,0.00,600.00,0.0000,0.0000,' +
        '0.00000,0.12346,100.00',
    );
    expect(rows.at(-1)).toBe('');
  });

  it('has frames of one row per frame and hearer, with no time for one never heard', () => {
    expect(read('frames.csv')).toBe(
      't_sent_s,t_heard_s,from,to,bytes,fate\n' +
        '12.25,13.679,amber,cobalt,32,heard\n16,,cobalt,amber,32,lost\n',
    );
  });

  it('has a log that gives back every mission, sense and steer to the last bit', async () => {
    const [start, ...rest] = await linesOf(join(folder, 'run'));
    expect(start).toMatchObject({ log: 1, title: 'Synthetic ring', seed: 41, tick_s: 1 });
    const { missions } = start as LogStart;
    expect(missions.map((mission) => missionSchema.parse(mission).vehicle)).toEqual(['amber', 'cobalt']);
    expect(rest.at(-1)).toEqual({ end: true, ticks: 31, digest: 'a'.repeat(64) });
    const ticks = rest.slice(0, -1) as LogTick[];
    expect(ticks.map(({ tick }) => tick)).toEqual(Array.from({ length: 31 }, (_, tick) => tick));
    expect(ticks[17]).toEqual({ tick: 17, senses: recordAt(17).senses, steers: recordAt(17).steers });
    for (const sense of ticks[17]!.senses) senseSchema.parse(sense);
    for (const steer of ticks[17]!.steers) steerSchema.parse(steer);
  });

  it('is never written to again', () => {
    expect(() => openRunFolder(join(folder, 'run'), trial, 'x')).toThrow(FolderProblem);
    expect(() => openRunFolder(join(folder, 'run'), trial, 'x')).toThrow(
      /holds a run, but a run needs a new or empty folder/,
    );
    expect(read('trial.yaml')).toBe('title: a trial\n');
  });
});

describe('a place for a run', () => {
  it('may be an empty folder, or one that is not there yet', async () => {
    mkdirSync(join(folder, 'empty'));
    await wholeRun(join(folder, 'empty'), 1);
    await wholeRun(join(folder, 'deep', 'er'), 1);
    expect(readdirSync(join(folder, 'deep', 'er'))).toContain('outcome.json');
  });

  it('may be neither a folder with other things in it nor a file', () => {
    writeFileSync(join(folder, 'notes.txt'), 'mine');
    expect(() => openRunFolder(folder, trial, 'x')).toThrow(/is not empty/);
    expect(readdirSync(folder)).toEqual(['notes.txt']);
    expect(() => openRunFolder(join(folder, 'notes.txt'), trial, 'x')).toThrow(FolderProblem);
  });
});

describe('a run that did not come to its end', () => {
  it('leaves a folder without an outcome, whose log is read to the last tick', async () => {
    const path = join(folder, 'run');
    const run = openRunFolder(path, trial, 'x');
    for (let tick = 0; tick < 12; tick++) run.take(recordAt(tick));
    await run.abandon();
    expect(readdirSync(path).sort()).toEqual(['frames.csv', 'log.ndjson.gz', 'tracks.csv', 'trial.yaml']);
    expect((await linesOf(path)).map((line) => ('tick' in line ? line.tick : 'start'))).toEqual([
      'start',
      ...Array(12).keys(),
    ]);
  });

  it('has put its lines into the file within a second, with nobody closing it', async () => {
    const path = join(folder, 'run');
    const run = openRunFolder(path, trial, 'x');
    for (let tick = 0; tick < 12; tick++) run.take(recordAt(tick));
    const before = performance.now();
    let ticks = 0;
    while (ticks < 12 && performance.now() - before < 5000) {
      await new Promise((resolve) => {
        setTimeout(resolve, 20);
      });
      ticks = (await linesOf(path)).filter((line) => 'tick' in line).length;
    }
    expect(ticks).toBe(12);
    expect(performance.now() - before).toBeLessThan(1000);
    expect(read('tracks.csv').split('\n')).toHaveLength(1 + 2 * 2 + 1);
    await run.abandon();
  });

  it('gives back a whole number of first lines wherever its log was cut', async () => {
    const path = join(folder, 'log.ndjson.gz');
    const file = openSync(path, 'wx');
    const log = new LogWriter(file);
    const written = Array.from({ length: 40 }, (_, tick) => ({
      tick,
      senses: [],
      steers: [],
      text: 'é'.repeat(tick),
    }));
    for (const line of written) {
      log.add(JSON.stringify(line));
      if (line.tick % 8 === 7) log.flush();
    }
    await log.finish();
    closeSync(file);
    const bytes = readFileSync(path);
    expect(gunzipSync(bytes).toString('utf8').split('\n')).toHaveLength(41);
    // Where each whole member ends: the magic number of the next one, or the end.
    const ends = [...bytes.keys()]
      .filter((at) => bytes.readUIntBE(Math.min(at, bytes.length - 3), 3) === 0x1f8b08)
      .slice(1);
    expect(ends).toHaveLength(4);
    let least = 0;
    for (let cut = bytes.length; cut > 0; cut -= 7) {
      writeFileSync(path, bytes);
      truncateSync(path, cut);
      const lines = await linesOf(folder);
      expect(lines).toEqual(written.slice(0, lines.length));
      const whole = ends.filter((end) => end <= cut).length + (cut === bytes.length ? 1 : 0);
      expect(lines.length).toBeGreaterThanOrEqual(8 * whole);
      least = Math.min(least, lines.length);
    }
    expect(least).toBe(0);
  });

  it('says so when a log is damaged or missing', async () => {
    await wholeRun(join(folder, 'run'), 20);
    const path = join(folder, 'run', 'log.ndjson.gz');
    const bytes = readFileSync(path);
    bytes.fill(0xff, 40, 60);
    writeFileSync(path, bytes);
    await expect(linesOf(join(folder, 'run'))).rejects.toThrow();
    await expect(linesOf(join(folder, 'nowhere'))).rejects.toThrow(/ENOENT/);
  });
});
