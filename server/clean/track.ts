import type { FixColumns } from '../../shared/model/recording.ts';

/**
 * Fixes on their way to a run: rows of the recording by index, in the order of travel, with times that may
 * have been corrected.
 */
export interface Track {
  /** Indices into the recording's columns. */
  readonly rows: Uint32Array;
  /** Unix seconds UTC of each. */
  readonly utcS: Float64Array;
}

/** Those of a track for which `keep` holds. */
export function filterTrack(track: Track, keep: (i: number) => boolean): Track {
  const kept: number[] = [];
  for (let i = 0; i < track.rows.length; i++) if (keep(i)) kept.push(i);
  if (kept.length === track.rows.length) return track;
  return pickTrack(track, kept);
}

/** The members `indices` of a track. */
export function pickTrack(track: Track, indices: readonly number[]): Track {
  const rows = new Uint32Array(indices.length);
  const utcS = new Float64Array(indices.length);
  indices.forEach((index, i) => {
    rows[i] = track.rows[index]!;
    utcS[i] = track.utcS[index]!;
  });
  return { rows, utcS };
}

/** Place of a fix for a finding: file, row and time. */
export function placeOf(fixes: FixColumns, file: string, row: number, utcS: number) {
  return { file, line: fixes.row[row]!, utcS };
}
