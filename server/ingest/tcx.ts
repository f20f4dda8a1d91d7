import type { Recording } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { decimal } from './decimal.ts';
import { ENCODING_NAMES, type TextNote } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { FixBuilder, wrapLongitude } from './fix-builder.ts';
import type { ReadContext } from './options.ts';
import { parseIso, type Stamp } from './timestamp.ts';
import { noteXmlEnd } from './xml-findings.ts';
import { readXml } from './xml-stream.ts';

/**
 * TCX: track points of activities and courses with a position; speed from the extension, m/s.
 * Source: TrainingCenterDatabase v2 and ActivityExtension v2 schemas.
 */
export async function readTcx(source: ByteSource, context: ReadContext): Promise<Recording> {
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  const stamp: Stamp = { utcS: NaN, zoned: false };
  let segment = -1;
  let title = '';
  const now = { inPoint: false };
  let line = 0;
  let point = { utcS: NaN, lat: NaN, lon: NaN, height: NaN, speed: NaN, placed: false };
  let without = 0;

  const finish = (): void => {
    const { utcS, lat, height, speed } = point;
    const lon = wrapLongitude(point.lon);
    if (!(Math.abs(lat) <= 90) || Number.isNaN(lon)) {
      if (!point.placed) without++;
      else {
        log.note(
          'bad-position',
          'warning',
          (n) => `${counted(n, 'point')} without a valid latitude and longitude left out`,
          { file: source.name, line },
          1,
        );
      }
      return;
    }
    fixes.add(utcS, lat, lon, Math.max(0, segment), line);
    if (!Number.isNaN(height)) fixes.set('elevationM', height);
    if (speed >= 0 && speed < 1e4) fixes.set('speedMps', speed);
  };

  const end = await readXml(source, note, /<(?:\w+:)?Trackpoint[\s/>]/, {
    open(name, _attributes, at) {
      if (name === 'Trackpoint') {
        now.inPoint = true;
        line = at;
        point = { utcS: NaN, lat: NaN, lon: NaN, height: NaN, speed: NaN, placed: false };
      } else if (name === 'Track') segment++;
    },
    close(name, text) {
      if (!now.inPoint) {
        if (title === '' && (name === 'Name' || name === 'Notes')) title = text.trim().slice(0, 500);
        return;
      }
      switch (name) {
        case 'Trackpoint':
          now.inPoint = false;
          finish();
          return;
        case 'Time':
          point.utcS = parseIso(text.trim(), stamp);
          if (Number.isNaN(point.utcS)) {
            log.note('bad-time', 'warning', (n) => `${counted(n, 'point')} with a time that cannot be read`, {
              file: source.name,
              line,
            });
          }
          return;
        case 'Position':
          point.placed = true;
          return;
        case 'LatitudeDegrees':
          point.lat = decimal(text);
          return;
        case 'LongitudeDegrees':
          point.lon = decimal(text);
          return;
        case 'AltitudeMeters':
          point.height = decimal(text);
          return;
        case 'Speed':
          point.speed = decimal(text);
      }
    },
    damaged(damage) {
      log.note(
        'damaged',
        'serious',
        (n) => `Damaged at ${counted(n, 'place')}: ${damage.cause}; points half read there were left out`,
        { file: source.name, line: damage.line },
        now.inPoint ? 1 : 0,
      );
      now.inPoint = false;
    },
  });
  if (without > 0) {
    log.note('no-fix', 'info', (n) => `${counted(n, 'track point')} without a position`, null, 0, without);
  }
  noteXmlEnd(log, end, note, source.name, now.inPoint ? 1 : 0);
  return {
    name: source.name,
    format: 'tcx',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title,
    fixes: fixes.columns(),
    sensors: null,
    waypoints: [],
    columns: [],
    findings: log.findings(),
  };
}
