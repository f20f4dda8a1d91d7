import type { Fault } from '../../shared/model/fault.ts';
import type { Analysis, Progress } from '../pipeline.ts';
import type { ColumnNames } from '../../shared/schema/api.ts';

/** What an analysis thread is given. */
export interface AnalysisOrder {
  readonly path: string;
  readonly name: string;
  readonly columns: ColumnNames;
}

/** What it answers: progress any number of times, then one result or one fault. */
export type AnalysisAnswer =
  | { readonly kind: 'progress'; readonly progress: Progress }
  | { readonly kind: 'done'; readonly analysis: Analysis }
  | { readonly kind: 'fault'; readonly fault: Fault };
