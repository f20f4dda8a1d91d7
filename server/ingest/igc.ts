import type { Recording } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { ENCODING_NAMES, textChunks, type TextNote } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { courseFromDegrees, FixBuilder, type FloatChannel } from './fix-builder.ts';
import type { ReadContext } from './options.ts';
import { checkedDays, checkedSeconds, fullYear } from './timestamp.ts';

const DAY_S = 86400;
const KMH_MPS = 1 / 3.6;

const B_RECORD = /^B(\d\d)(\d\d)(\d\d)(\d\d)(\d{5})([NS])(\d{3})(\d{5})([EW])([AV])([\d-]\d{4})([\d-]\d{4})/;

/** Extensions of the fix record that are kept: three-letter code, channel and factor of its digits. */
const EXTENSIONS: Record<string, { channel: FloatChannel; factor: number }> = {
  FXA: { channel: 'accuracyM', factor: 1 },
  GSP: { channel: 'speedMps', factor: KMH_MPS },
};

interface Extension {
  readonly code: string;
  readonly start: number;
  readonly end: number;
}

/** Extensions announced by an I record: `I` count, then start, end and code of each. */
function extensionsOf(record: string): Extension[] {
  const found: Extension[] = [];
  for (const [, start, end, code] of record.slice(3).matchAll(/(\d\d)(\d\d)([A-Z]{3})/g)) {
    found.push({ code: code!, start: Number(start) - 1, end: Number(end) });
  }
  return found;
}

/**
 * IGC flight recorder files: fix records with the date of the header, days counted on over midnight.
 * Decimal seconds, ground speed, true track and accuracy are read where the recorder announces them.
 * Source: FAI technical specification for GNSS flight recorders, appendix A.
 */
export async function readIgc(source: ByteSource, context: ReadContext): Promise<Recording> {
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  let day = NaN;
  let lastTod = -1;
  let extensions: Extension[] = [];
  let line = 0;
  let voids = 0;

  const fix = (record: string): void => {
    const match = B_RECORD.exec(record);
    const tod = match === null ? NaN : checkedSeconds(Number(match[1]), Number(match[2]), Number(match[3]));
    const lat = match === null ? NaN : Number(match[4]) + Number(match[5]) / 60_000;
    const lon = match === null ? NaN : Number(match[7]) + Number(match[8]) / 60_000;
    if (match === null || Number.isNaN(tod) || !(lat <= 90) || !(lon <= 180) || Number(match[5]) >= 60_000) {
      log.note(
        'bad-row',
        'warning',
        (n) => `${counted(n, 'fix record')} that cannot be read left out`,
        { file: source.name, line },
        1,
      );
      return;
    }
    if (lastTod > tod + DAY_S / 2) day++;
    lastTod = tod;
    let fraction = 0;
    for (const { code, start, end } of extensions) {
      const digits = record.slice(start, end);
      if (code === 'TDS' && /^\d+$/.test(digits)) fraction = Number(digits) / 10 ** digits.length;
    }
    if (match[10] === 'V') voids++;
    fixes.add(
      (Number.isNaN(day) ? 0 : day * DAY_S) + tod + fraction,
      match[6] === 'S' ? -lat : lat,
      match[9] === 'W' ? -lon : lon,
      0,
      line,
    );
    // The height of the receiver; the pressure height where it has none.
    const height = Number(match[12]);
    fixes.set('elevationM', height === 0 ? Number(match[11]) : height);
    for (const { code, start, end } of extensions) {
      const digits = record.slice(start, end);
      if (!/^\d+$/.test(digits)) continue;
      const kept = EXTENSIONS[code];
      if (kept !== undefined) fixes.set(kept.channel, Number(digits) * kept.factor);
      else if (code === 'TRT') fixes.set('courseRad', courseFromDegrees(Number(digits)));
      else if (code === 'SIU' && Number(digits) < 255) fixes.setByte('satellites', Number(digits));
    }
  };

  const record = (text: string): void => {
    line++;
    switch (text.charCodeAt(0)) {
      case 66:
        fix(text);
        return;
      case 73:
        extensions = extensionsOf(text);
        return;
      case 72: {
        const date = /^H[FOP]DTE(?:DATE:?)?\s*(\d\d)(\d\d)(\d\d)/.exec(text);
        if (date === null) return;
        day = checkedDays(fullYear(Number(date[3])), Number(date[2]), Number(date[1]));
        lastTod = -1;
      }
    }
  };

  let carry = '';
  for await (const chunk of textChunks(source, note)) {
    const lines = (carry + chunk).split(/\r\n|\n|\r/);
    carry = lines.pop() ?? '';
    for (const text of lines) record(text);
    // No record is this long: noise between line ends must not gather.
    if (carry.length > 100_000) carry = '';
  }
  if (carry !== '') record(carry);
  if (Number.isNaN(day) && fixes.count > 0) {
    log.note('no-date', 'warning', () => 'The header states no date: times count from an unknown day', {
      file: source.name,
    });
  }
  if (voids > 0)
    log.note('no-fix', 'info', (n) => `${counted(n, 'fix', 'fixes')} without height (2-D)`, null, 0, voids);
  return {
    name: source.name,
    format: 'igc',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title: '',
    fixes: fixes.columns(),
    sensors: null,
    waypoints: [],
    columns: [],
    findings: log.findings(),
  };
}
