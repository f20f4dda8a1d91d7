import type { MessagePort } from 'node:worker_threads';
import type { Fault } from '../../shared/model/fault.ts';
import type { ColumnNames } from '../../shared/schema/api.ts';
import type { Analysis } from '../pipeline.ts';

/** What an analysis thread is given. */
export interface AnalysisOrder {
  readonly path: string;
  readonly name: string;
  readonly columns: ColumnNames;
  /** Where progress is told (`Progress` of the pipeline). */
  readonly port: MessagePort;
}

/** What it answers. */
export type AnalysisAnswer = { readonly analysis: Analysis } | { readonly fault: Fault };
