/** What a report is made from. */
import type { Trial } from '../trial/schema.ts';
import type { MeasureReport } from './measure-report.ts';
import type { Outcome } from './outcome.ts';

export interface ReportInput {
  readonly trial: Trial;
  readonly outcome: Outcome;
  readonly report: MeasureReport;
}
