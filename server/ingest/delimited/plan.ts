import { BendbookError } from '../../../shared/model/fault.ts';
import type { ColumnUse } from '../../../shared/model/recording.ts';
import type { ColumnNames } from '../../../shared/schema/api.ts';
import { decimal } from '../decimal.ts';
import { parseIso } from '../timestamp.ts';
import { parseAngle, type AngleForm } from './angles.ts';
import { DEFAULT_UNIT, factorOf, fieldNamed, recogniseHeader, unitFor, type ColumnField } from './columns.ts';
import { guessDateOrder, parseClock, parseDate, type DateOrder } from './dates.ts';
import { findDialect, splitLine, type Delimiter } from './dialect.ts';

/** How the times of the rows are written. */
export type TimeForm =
  | { readonly kind: 'epoch'; readonly column: number; readonly secondsPerUnit: number }
  /** Seconds from an unknown start. */
  | { readonly kind: 'elapsed'; readonly column: number; readonly secondsPerUnit: number }
  | { readonly kind: 'text'; readonly column: number; readonly order: DateOrder }
  | { readonly kind: 'pair'; readonly date: number; readonly time: number; readonly order: DateOrder };

export interface PlannedColumn {
  readonly field: ColumnField;
  readonly column: number;
  /** Unit in the cells, '' when the field has none or it is judged later by size. */
  readonly unit: string;
  readonly factor: number;
}

/** Everything known of a delimited file before its rows are read. */
export interface Plan {
  readonly delimiter: Delimiter;
  readonly decimalComma: boolean;
  readonly headers: readonly string[];
  /** Lines above the first row of data. */
  readonly skipLines: number;
  readonly latitude: number;
  readonly longitude: number;
  readonly latHemisphere: number;
  readonly lonHemisphere: number;
  readonly angleForm: AngleForm;
  readonly swapped: boolean;
  readonly time: TimeForm;
  /** Time of the sensors where the file has one beside that of the fixes. */
  readonly sensorTime: TimeForm | null;
  /** Day-month order could be another. */
  readonly orderUnsure: boolean;
  readonly channels: readonly PlannedColumn[];
  readonly segment: number;
  readonly uses: readonly ColumnUse[];
}

/** Rows after the header that may hold units or sources of the columns. */
const MOST_HEADER_ROWS = 4;
const SAMPLE_ROWS = 400;

interface Choice {
  column: number;
  unit: string;
  guessed: boolean;
  rank: number;
}

const tidy = (cell: string) => cell.replaceAll('\0', '').trim();

/**
 * Decides from the first lines how a delimited file is to be read.
 * Throws `ingest/columns-unknown`, naming the columns found, when latitude, longitude or time cannot be
 * told; `ingest/unknown-field` or `ingest/unknown-column` for columns named by hand that do not exist.
 */
export function planColumns(lines: readonly string[], columns: ColumnNames, file: string): Plan {
  const { delimiter, headerLine, headers } = findDialect(lines, columns);
  const choices = chooseColumns(headers, columns, file, headerLine);
  const need = (field: ColumnField, what: string): number => {
    const choice = choices.get(field);
    if (choice !== undefined) return choice.column;
    throw unknownColumns(what, headers, file, headerLine);
  };
  const latitude = need('latDeg', 'latitude');
  const longitude = need('lonDeg', 'longitude');

  const rows = lines
    .slice(headerLine + 1, headerLine + 1 + SAMPLE_ROWS)
    .map((line) => splitLine(line, delimiter).map(tidy));
  const cell = (row: readonly string[], column: number) => row[column] ?? '';
  const isPosition = (row: readonly string[]) =>
    !Number.isNaN(angleOf(cell(row, latitude))) && !Number.isNaN(angleOf(cell(row, longitude)));
  // Unit rows stand between the header and the first row with a position.
  let extra = 0;
  if (headerLine >= 0) {
    const first = rows.findIndex(isPosition);
    if (first > 0 && first <= MOST_HEADER_ROWS && rows.slice(0, first).every((row) => !hasNumber(row))) extra = first;
  }
  for (const row of rows.slice(0, extra)) {
    for (const [field, choice] of choices) {
      const unit = unitFor(field, cell(row, choice.column)) || (cell(row, choice.column) === 'DOP' ? 'DOP' : '');
      if (unit !== '' && choice.unit === '') choice.unit = unit;
    }
  }
  const data = rows.slice(extra).filter(isPosition);
  const samples = (column: number) => data.map((row) => cell(row, column)).filter((text) => text !== '');

  const decimalComma =
    delimiter !== ',' && samples(latitude).some((text) => /^[^.]*\d,\d[^.]*$/.test(text) && !text.includes('.'));
  const { form, swapped } = judgeAngles(samples(latitude), samples(longitude), choices.has('latHemisphere'));

  // A precision stated as dilution is no length.
  const accuracy = choices.get('accuracyM');
  if (accuracy?.unit === 'DOP') {
    choices.delete('accuracyM');
    if (!choices.has('hdop')) choices.set('hdop', accuracy);
  }
  const { time, sensorTime, orderUnsure, used } = judgeTimes(choices, samples);
  if (time === null) throw unknownColumns('time', headers, file, headerLine);

  const channels: PlannedColumn[] = [];
  const uses: ColumnUse[] = headers.map((header) => ({ header, field: 'ignored', unit: '', guessed: false }));
  for (const [field, choice] of choices) {
    const isTime = field === 'utcS' || field === 'date' || field === 'timeOfDay';
    if (isTime && !used.has(choice.column)) continue;
    let { unit, guessed } = choice;
    if (!isTime && unit === '') {
      // Units inside the cells, "0.865 km/h", say it as well as a header.
      const inCell = /[a-zA-Z°/²]+$/.exec(samples(choice.column)[0] ?? '')?.[0] ?? '';
      unit = unitFor(field, inCell);
      if (unit === '' && DEFAULT_UNIT[field] !== undefined) {
        unit = DEFAULT_UNIT[field];
        guessed = true;
      }
    }
    const shown = isTime ? timeUnit(time, choice.column) || timeUnit(sensorTime, choice.column) : unit;
    // A column headed "time" or "date" may hold both.
    const fed = isTime && time.kind !== 'pair' ? 'utcS' : field;
    uses[choice.column] = { header: headers[choice.column]!, field: fed, unit: shown, guessed };
    if (!isTime && !NOT_CHANNELS.has(field)) {
      channels.push({ field, column: choice.column, unit, factor: factorOf(unit) });
    }
  }
  return {
    delimiter,
    decimalComma,
    headers,
    skipLines: headerLine + 1 + extra,
    latitude: swapped ? longitude : latitude,
    longitude: swapped ? latitude : longitude,
    latHemisphere: choices.get('latHemisphere')?.column ?? -1,
    lonHemisphere: choices.get('lonHemisphere')?.column ?? -1,
    angleForm: form,
    swapped,
    time,
    sensorTime,
    orderUnsure,
    channels,
    segment: choices.get('segment')?.column ?? -1,
    uses,
  };
}

const NOT_CHANNELS = new Set<ColumnField>(['latDeg', 'lonDeg', 'latHemisphere', 'lonHemisphere', 'segment']);

function hasNumber(row: readonly string[]): boolean {
  return row.filter((text) => !Number.isNaN(decimal(text))).length > 1;
}

/** Position as written; only whether it can be one matters here. */
function angleOf(text: string): number {
  const plain = decimal(text.replace(',', '.'));
  return Number.isNaN(plain) ? parseAngle(text) : plain;
}

/** Which column feeds which field: named by hand first, then by its header. */
function chooseColumns(
  headers: readonly string[],
  columns: ColumnNames,
  file: string,
  headerLine: number,
): Map<ColumnField, Choice> {
  const choices = new Map<ColumnField, Choice>();
  const taken = new Set<number>();
  for (const [name, { header, unit }] of Object.entries(columns)) {
    const field = fieldNamed(name);
    const column = headers.findIndex((found) => found.toLowerCase() === header.trim().toLowerCase());
    if (column < 0) {
      throw new BendbookError('ingest/unknown-column', {
        cause: `There is no column "${header}"; the columns are: ${listed(headers)}`,
        place: { file, column: header, line: Math.max(1, headerLine + 1) },
        remedy: 'Name one of these columns',
      });
    }
    const known = unit === undefined || unit === '' ? '' : unitFor(field, unit);
    if (unit !== undefined && unit !== '' && known === '') {
      throw new BendbookError('ingest/unknown-unit', {
        cause: `"${unit}" is not a unit that column "${header}" can have`,
        place: { file, column: header },
        remedy: 'Use for example km/h, m/s, mph or kn for a speed, ° or rad for a course, m or ft for a height',
      });
    }
    choices.set(field, { column, unit: known, guessed: false, rank: Infinity });
    taken.add(column);
  }
  headers.forEach((header, column) => {
    if (taken.has(column)) return;
    const found = recogniseHeader(header);
    if (found === null) return;
    const present = choices.get(found.field);
    if (present !== undefined && present.rank >= found.rank) return;
    choices.set(found.field, { column, unit: found.unit, guessed: false, rank: found.rank });
  });
  return choices;
}

const listed = (headers: readonly string[]) =>
  headers.length === 0
    ? 'none'
    : headers
        .slice(0, 60)
        .map((header) => `"${header.slice(0, 40)}"`)
        .join(', ');

function unknownColumns(what: string, headers: readonly string[], file: string, headerLine: number): BendbookError {
  return new BendbookError('ingest/columns-unknown', {
    cause: `No column can be told to be the ${what}; the columns found are: ${listed(headers)}`,
    place: { file, line: Math.max(1, headerLine + 1) },
    remedy: `Name the columns of latitude, longitude and time by hand`,
  });
}

/** Notation of positions from their size, and whether the two columns are swapped. */
function judgeAngles(
  latitudes: readonly string[],
  longitudes: readonly string[],
  hemispheres: boolean,
): { form: AngleForm; swapped: boolean } {
  const largest = (texts: readonly string[]) =>
    texts.reduce((most, text) => Math.max(most, Math.abs(decimal(text.replace(',', '.'))) || 0), 0);
  const lat = largest(latitudes);
  const lon = largest(longitudes);
  const whole = [...latitudes, ...longitudes].every((text) => /^[+-]?\d+(?:\.0*)?$/.test(text));
  if (whole && Math.max(lat, lon) > 1e6) {
    const form = Math.max(lat, lon) > 1.8e8 || lat > 9e7 ? 'e7' : Math.max(lat, lon) > 2e7 ? 'e7' : 'e6';
    return { form, swapped: false };
  }
  const minutesFit = (texts: readonly string[]) =>
    texts.every((text) => {
      const value = Math.abs(decimal(text.replace(',', '.')));
      return Number.isNaN(value) || value % 100 < 60;
    });
  if ((lat > 180 || lon > 360 || (hemispheres && lat > 90)) && lat < 9060 && lon < 18060) {
    if (minutesFit(latitudes) && minutesFit(longitudes)) return { form: 'degrees-minutes', swapped: false };
  }
  // All of them, but for a false one here and there, beyond 90° under "latitude" and none under "longitude".
  const beyond = (texts: readonly string[]) =>
    texts.filter((text) => Math.abs(decimal(text.replace(',', '.'))) > 90).length / Math.max(1, texts.length);
  return { form: 'degrees', swapped: beyond(latitudes) > 0.9 && lat <= 180 && beyond(longitudes) === 0 };
}

function timeUnit(time: TimeForm | null, column: number): string {
  if (time === null) return '';
  if (time.kind === 'pair') {
    return time.date === column ? time.order : time.time === column ? 'hh:mm:ss' : '';
  }
  if (time.column !== column) return '';
  if (time.kind === 'text') return 'date and time';
  const unit = { 1: 's', 0.001: 'ms', 1e-6: 'us', 1e-9: 'ns' }[time.secondsPerUnit] ?? 's';
  return time.kind === 'epoch' ? `${unit} since 1970` : `${unit} from the start`;
}

const UNIT_SECONDS: Record<string, number> = { s: 1, ms: 1e-3, us: 1e-6, ns: 1e-9 };

/** Form of a single column of times, or null when its cells are no times of a known day. */
function judgeColumn(column: number, texts: readonly string[], unit: string, elapsed: boolean): TimeForm | null {
  const first = texts[0];
  if (first === undefined) return null;
  const numbers = texts.map((text) => decimal(text.replace(',', '.')));
  if (numbers.every((value) => !Number.isNaN(value))) {
    const typical = Math.abs(numbers[Math.floor(numbers.length / 2)]!);
    // Seconds since 1970 from 1980 to 2100 are 3.2e8 to 4.1e9; a thousand times that for each finer unit.
    for (const secondsPerUnit of [1, 1e-3, 1e-6, 1e-9]) {
      const seconds = typical * secondsPerUnit;
      if (seconds > 3.1e8 && seconds < 4.2e9) return { kind: 'epoch', column, secondsPerUnit };
    }
    if (elapsed || unit !== '') return { kind: 'elapsed', column, secondsPerUnit: UNIT_SECONDS[unit] ?? 1 };
    if (!numbers.every((value) => Number.isInteger(value))) return { kind: 'elapsed', column, secondsPerUnit: 1 };
    return null;
  }
  const { order } = guessDateOrder(texts, ['dmy', 'mdy', 'ymd']);
  const stamp = { utcS: NaN, zoned: false };
  const readable = texts.filter((text) => {
    if (!Number.isNaN(parseIso(text, stamp))) return true;
    const { days, length } = parseDate(text, order);
    return !Number.isNaN(days) && !Number.isNaN(parseClock(text.slice(length).replace(/^[\sT,]+/, '')).seconds);
  });
  return readable.length >= 0.5 * texts.length ? { kind: 'text', column, order } : null;
}

function judgeTimes(
  choices: ReadonlyMap<ColumnField, Choice>,
  samples: (column: number) => string[],
): { time: TimeForm | null; sensorTime: TimeForm | null; orderUnsure: boolean; used: ReadonlySet<number> } {
  const used = new Set<number>();
  const stampChoice = choices.get('utcS');
  const clockChoice = choices.get('timeOfDay');
  const dateChoice = choices.get('date');
  let orderUnsure = false;

  let pair: TimeForm | null = null;
  if (dateChoice !== undefined && clockChoice !== undefined) {
    const dates = samples(dateChoice.column);
    const clocks = samples(clockChoice.column);
    const { order, sure } = guessDateOrder(
      dates,
      /^\d{5,6}/.test(dates[0] ?? '') ? ['ymd', 'dmy', 'mdy'] : ['dmy', 'mdy', 'ymd'],
    );
    const readable = dates.length > 0 && dates.some((text) => !Number.isNaN(parseDate(text, order).days));
    if (readable && clocks.some((text) => !Number.isNaN(parseClock(text).seconds))) {
      pair = { kind: 'pair', date: dateChoice.column, time: clockChoice.column, order };
      orderUnsure = !sure && !/^\d{4}/.test(dates[0] ?? '');
    }
  }
  const single = (choice: Choice | undefined, elapsed: boolean): TimeForm | null =>
    choice === undefined ? null : judgeColumn(choice.column, samples(choice.column), choice.unit, elapsed);
  const stamp = single(stampChoice, stampChoice?.rank === 0);
  const text = stamp?.kind === 'text' ? stamp : null;
  if (text !== null) orderUnsure = !guessDateOrder(samples(text.column), ['dmy', 'mdy']).sure;

  let time: TimeForm | null;
  let sensorTime: TimeForm | null = null;
  if (pair !== null && stampChoice?.rank !== Infinity) {
    // The receiver's own date and time place the fix; a stamp beside them is the recorder's clock.
    time = pair;
    sensorTime = stamp !== null && stamp.kind !== 'elapsed' ? stamp : null;
  } else {
    time = stamp !== null && stamp.kind !== 'elapsed' ? stamp : null;
    time ??= single(clockChoice, false) ?? single(dateChoice, false);
    time ??= stamp;
    if (time === null && clockChoice !== undefined) {
      // A clock without a date: the day is unknown, the intervals are not.
      const clocks = samples(clockChoice.column);
      if (clocks.some((value) => !Number.isNaN(parseClock(value).seconds))) {
        time = { kind: 'pair', date: -1, time: clockChoice.column, order: 'ymd' };
      }
    }
  }
  for (const form of [time, sensorTime]) {
    if (form === null) continue;
    if (form.kind === 'pair') used.add(form.date).add(form.time);
    else used.add(form.column);
  }
  return { time, sensorTime, orderUnsure, used };
}
