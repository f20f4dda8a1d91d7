/** Where something went wrong: as much of it as is known. */
export interface Place {
  readonly file?: string | undefined;
  /** 1-based line of a text file. */
  readonly line?: number | undefined;
  /** 0-based byte offset. */
  readonly byte?: number | undefined;
  readonly column?: string | undefined;
  /** Unix seconds, UTC. */
  readonly utcS?: number | undefined;
  readonly chainageM?: number | undefined;
}

/** A failure as data: told to the user as cause, place and remedy. */
export interface Fault {
  /** Stable identifier, `stage/what`, for example `ingest/no-times`. */
  readonly code: string;
  /** What is wrong, in one sentence without a full stop at the end. */
  readonly cause: string;
  readonly place: Place;
  /** What the user can do about it. */
  readonly remedy: string;
}

/** Thrown only when no result is possible; everything less is a Finding. */
export class BendbookError extends Error {
  readonly fault: Fault;

  constructor(code: string, detail: { cause: string; place?: Place; remedy: string }, options?: ErrorOptions) {
    super(`${detail.cause} (${code})`, options);
    this.name = 'BendbookError';
    this.fault = { code, cause: detail.cause, place: detail.place ?? {}, remedy: detail.remedy };
  }
}

/** One line of text: place, cause, remedy. */
export function describeFault(fault: Fault): string {
  const { file, line, byte, column, utcS, chainageM } = fault.place;
  const parts: string[] = [];
  if (file !== undefined) parts.push(file);
  if (line !== undefined) parts.push(`line ${String(line)}`);
  if (byte !== undefined) parts.push(`byte ${String(byte)}`);
  if (column !== undefined) parts.push(`column "${column}"`);
  if (utcS !== undefined && Number.isFinite(utcS)) parts.push(new Date(utcS * 1000).toISOString());
  if (chainageM !== undefined) parts.push(`chainage ${chainageM.toFixed(0)} m`);
  const where = parts.length > 0 ? `${parts.join(', ')}: ` : '';
  return `${where}${fault.cause}. ${fault.remedy}`;
}
