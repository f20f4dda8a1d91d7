import { parse } from 'csv-parse/sync';
import type { Delimiter } from './dialect.ts';
import type { RowCells } from './time-reader.ts';

const [LF, CR, QUOTE, SPACE, NUL] = [10, 13, 34, 32, 0];
/** A quoted record longer than this is an unpaired quote. */
const MAX_RECORD = 1 << 16;
const MAX_CELLS = 1024;

interface QuotedRecord {
  record: string[];
  info: { lines: number };
}

/**
 * Cuts blocks of whole lines into cells without making a string of any: the fast path for text without
 * quotes. From the first quote of a block on, csv-parse reads the block, with its limits; where it
 * finds the quoting broken, line by line, and what cannot be read is told to `onBroken`.
 */
export class RowSplitter {
  /** 1-based number of the next line. */
  line = 1;
  readonly #delimiter: Delimiter;
  readonly #delimiterByte: number;
  /** Cells beyond this are not looked at. */
  readonly #lastCell: number;
  readonly #onRow: (row: RowCells, line: number) => void;
  readonly #onBroken: (line: number) => void;
  readonly #row: RowCells = {
    bytes: Buffer.alloc(0),
    starts: new Int32Array(MAX_CELLS),
    ends: new Int32Array(MAX_CELLS),
    count: 0,
  };
  #scratch = Buffer.alloc(MAX_RECORD);

  constructor(
    delimiter: Delimiter,
    lastCell: number,
    onRow: (row: RowCells, line: number) => void,
    onBroken: (line: number) => void,
  ) {
    this.#delimiter = delimiter;
    this.#delimiterByte = delimiter.charCodeAt(0);
    this.#lastCell = Math.min(lastCell, MAX_CELLS - 1);
    this.#onRow = onRow;
    this.#onBroken = onBroken;
  }

  block(block: Uint8Array): void {
    const bytes = Buffer.from(block.buffer, block.byteOffset, block.length);
    const row = this.#row;
    const { starts, ends } = row;
    const delimiter = this.#delimiterByte;
    const lastCell = this.#lastCell;
    const length = bytes.length;
    row.bytes = bytes;
    let p = 0;
    while (p < length) {
      const lineStart = p;
      let cell = 0;
      let cellStart = p;
      let b = LF;
      // Cells wanted, then on to the end of the line.
      for (; p < length; p++) {
        b = bytes[p]!;
        if (b === delimiter) {
          if (cell <= lastCell) this.#put(bytes, cell++, cellStart, p);
          cellStart = p + 1;
          if (cell > lastCell) {
            const next = bytes.indexOf(LF, p);
            p = next < 0 ? length : next;
            // Lines ended by CR alone hold no LF: look again, byte by byte.
            const cr = bytes.subarray(cellStart, p).indexOf(CR);
            if (cr >= 0) p = cellStart + cr;
            b = p < length ? bytes[p]! : LF;
            break;
          }
        } else if (b === LF || b === CR) break;
        else if (b === QUOTE) {
          this.#quoted(bytes.subarray(lineStart));
          return;
        }
      }
      if (cell <= lastCell) this.#put(bytes, cell++, cellStart, p);
      if (b === CR && bytes[p + 1] === LF) p++;
      p++;
      const line = this.line++;
      row.count = cell;
      // A blank line is no row.
      if (cell > 1 || ends[0]! > starts[0]!) this.#onRow(row, line);
    }
  }

  /** Notes a cell without the blanks and padding around it. */
  #put(bytes: Buffer, cell: number, start: number, end: number): void {
    while (start < end && (bytes[start] === SPACE || bytes[start] === NUL)) start++;
    while (end > start && (bytes[end - 1] === SPACE || bytes[end - 1] === NUL)) end--;
    this.#row.starts[cell] = start;
    this.#row.ends[cell] = end;
  }

  #quoted(bytes: Buffer): void {
    const text = bytes.toString('utf8');
    const first = this.line;
    try {
      for (const { record, info } of this.#parse(text)) this.#emit(record, first + info.lines - 1);
      this.line = first + countLines(text);
      return;
    } catch {
      // Broken quoting somewhere in the block: find the line.
    }
    this.line = first;
    for (const line of text.split(/\r\n|\r|\n/)) {
      const number = this.line++;
      if (line.trim() === '') continue;
      try {
        for (const { record } of this.#parse(line)) this.#emit(record, number);
      } catch {
        this.#onBroken(number);
      }
    }
    // The split gives one piece more than there are line ends.
    if (/[\r\n]$/.test(text)) this.line--;
  }

  #parse(text: string): QuotedRecord[] {
    return parse(text, {
      delimiter: this.#delimiter,
      relax_column_count: true,
      skip_empty_lines: true,
      max_record_size: MAX_RECORD,
      info: true,
    }) as unknown as QuotedRecord[];
  }

  #emit(record: readonly string[], line: number): void {
    const row = this.#row;
    let at = 0;
    const count = Math.min(record.length, this.#lastCell + 1);
    const needed = record.reduce((total, cell) => total + 3 * cell.length, 0);
    if (needed > this.#scratch.length) this.#scratch = Buffer.alloc(needed);
    row.bytes = this.#scratch;
    for (let i = 0; i < count; i++) {
      const end = at + this.#scratch.write(record[i]!, at);
      this.#put(this.#scratch, i, at, end);
      at = end;
    }
    row.count = count;
    this.#onRow(row, line);
  }
}

function countLines(text: string): number {
  return (text.match(/\r\n|\r|\n/g) ?? []).length;
}
