import type { Fault } from '../../shared/model/fault.ts';
import type { Recording } from '../../shared/model/recording.ts';
import type { ColumnNames } from '../../shared/schema/api.ts';

export interface IngestOptions {
  /** Name shown to the user; errors name the file by it. */
  readonly name: string;
  /** Columns of a delimited file named by hand. */
  readonly columns?: ColumnNames;
  readonly signal?: AbortSignal;
  onProgress?(bytesRead: number, bytesTotal: number): void;
  /** More points than this are refused; 20 million by default. */
  readonly maxFixes?: number;
}

export interface IngestResult {
  readonly recordings: Recording[];
  /** What could not be used, by name: the file itself or members of an archive. */
  readonly refused: { readonly name: string; readonly fault: Fault }[];
}

/** What every format reader is given beside the bytes. */
export interface ReadContext {
  readonly columns: ColumnNames;
  readonly maxFixes: number;
}

export const DEFAULT_MAX_FIXES = 20_000_000;
