import { roundRow } from '../../shared/schema/curve-columns.ts';
import type { CriterionResult, CurveRow } from '../../shared/schema/curve-row.ts';
import type { ReportContext } from './context.ts';

/** The curve table as JSON: the rows under the names of the CSV, each with its criteria and working. */
export interface CurveTableJson {
  readonly format: 'bendbook curve table';
  readonly formatVersion: 1;
  readonly software: string;
  readonly title: string;
  readonly cautions: readonly string[];
  readonly setup: ReportContext['setup'];
  readonly runs: readonly {
    readonly id: string;
    readonly name: string;
    readonly startUtcS: number;
    readonly durationS: number;
    readonly lengthM: number;
    readonly fixCount: number;
    readonly topSpeedKmh: number;
    readonly recording: { readonly name: string; readonly sha256: string; readonly bytes: number };
    readonly findings: ReportContext['runs'][number]['findings'];
  }[];
  readonly curves: readonly (CurveRow & { readonly criteria: readonly CriterionResult[] })[];
}

export function curveTableJson(context: ReportContext): CurveTableJson {
  return {
    format: 'bendbook curve table',
    formatVersion: 1,
    software: context.software,
    title: context.title,
    cautions: context.cautions,
    setup: context.setup,
    runs: context.runs.map(
      ({ id, name, startUtcS, durationS, lengthM, fixCount, topSpeedKmh, recording, findings }) => ({
        id,
        name,
        startUtcS,
        durationS,
        lengthM,
        fixCount,
        topSpeedKmh,
        recording,
        findings,
      }),
    ),
    curves: context.runs.flatMap((run) =>
      run.curves.map(({ row, criteria }) => ({ ...roundRow(row), criteria: [...criteria] })),
    ),
  };
}
