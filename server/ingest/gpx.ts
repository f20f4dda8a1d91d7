import type { Recording, Waypoint } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { decimal } from './decimal.ts';
import { ENCODING_NAMES, type TextNote } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { courseFromDegrees, FixBuilder, wrapLongitude } from './fix-builder.ts';
import { readGpxDetails } from './gpx-details.ts';
import type { ReadContext } from './options.ts';
import { parseIso, type Stamp } from './timestamp.ts';
import { noteXmlEnd } from './xml-findings.ts';
import { readXml } from './xml-stream.ts';

/** The document without track points, for gpxparser, is cut off here. */
const MAX_SLIM = 4 << 20;

/** GPX 1.1 schema, fixType; `pps` is a military receiver's own solution. */
const FIX_QUALITY: Record<string, number> = { none: 0, '2d': 1, '3d': 1, dgps: 2, pps: 1, rtk: 4, 'rtk-float': 5 };

function escapeXml(text: string): string {
  return text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;').replace(/"/g, '&quot;');
}

/**
 * GPX 1.0 and 1.1: track points in a stream into columns; everything else in a slim copy to gpxparser.
 * Speed (m/s) and course (degrees) are read from the point itself (GPX 1.0) and from extensions under
 * any prefix and depth; stated accuracies likewise.
 * Source: GPX 1.0 and 1.1 schemas, topografix.com/GPX.
 */
export async function readGpx(source: ByteSource, context: ReadContext): Promise<Recording> {
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  const stamp: Stamp = { utcS: NaN, zoned: false };

  let slim = '';
  /** Whether the slim copy is full, and whether it has anything for gpxparser. */
  const copy = { full: false, details: false };
  let title = '';
  let segment = -1;
  let inTrack = false;
  /** Whether a track point is open, and whether its place is good. */
  const now = { inPoint: false, good: false };
  let line = 0;
  let path: string[] = [];
  const emit = (piece: string) => {
    if (slim.length + piece.length > MAX_SLIM) copy.full = true;
    if (!copy.full) slim += piece;
  };

  const beginPoint = (attributes: Record<string, string>): void => {
    now.inPoint = true;
    const lat = decimal(attributes.lat ?? '');
    const lon = wrapLongitude(decimal(attributes.lon ?? ''));
    now.good = lat >= -90 && lat <= 90 && !Number.isNaN(lon);
    if (!now.good) {
      log.note(
        'bad-position',
        'warning',
        (n) => `${counted(n, 'point')} without a valid latitude and longitude left out`,
        { file: source.name, line },
        1,
      );
      return;
    }
    if (segment < 0) segment = 0;
    fixes.add(NaN, lat, lon, segment, line);
  };

  const pointValue = (name: string, text: string): void => {
    if (!now.good) return;
    switch (name) {
      case 'time': {
        const utcS = parseIso(text.trim(), stamp);
        if (Number.isNaN(utcS)) {
          log.note('bad-time', 'warning', (n) => `${counted(n, 'point')} with a time that cannot be read`, {
            file: source.name,
            line,
          });
        } else {
          fixes.setUtcAt(fixes.count - 1, utcS);
          if (!stamp.zoned) {
            log.note('no-zone', 'info', (n) => `${counted(n, 'time')} without a zone taken as UTC, as GPX asks`);
          }
        }
        return;
      }
      case 'ele':
        fixes.set('elevationM', decimal(text));
        return;
      case 'speed':
        setNonNegative('speedMps', text);
        return;
      case 'course':
      case 'bearing':
      case 'heading':
        fixes.set('courseRad', courseFromDegrees(decimal(text)));
        return;
      case 'hdop':
        setNonNegative('hdop', text);
        return;
      case 'hAcc':
      case 'hacc':
      case 'accuracy':
      case 'horizontalAccuracy':
        setNonNegative('accuracyM', text);
        return;
      case 'sAcc':
      case 'speedAccuracy':
        setNonNegative('speedAccuracyMps', text);
        return;
      case 'courseAccuracy':
      case 'bearingAccuracy': {
        const degrees = decimal(text);
        if (degrees >= 0) fixes.set('courseAccuracyRad', (degrees * Math.PI) / 180);
        return;
      }
      case 'sat': {
        const value = decimal(text);
        if (value >= 0 && value < 255) fixes.setByte('satellites', value);
        return;
      }
      case 'fix': {
        const quality = FIX_QUALITY[text.trim().toLowerCase()];
        if (quality !== undefined) fixes.setByte('fixQuality', quality);
      }
    }
  };

  const setNonNegative = (channel: 'speedMps' | 'hdop' | 'accuracyM' | 'speedAccuracyMps', text: string): void => {
    const value = decimal(text);
    if (value >= 0 && value < 1e6) fixes.set(channel, value);
  };

  const end = await readXml(source, note, /<(?:\w+:)?trkpt[\s/>]/, {
    open(name, attributes, at) {
      if (now.inPoint) return;
      if (name === 'trkpt') {
        line = at;
        beginPoint(attributes);
        return;
      }
      if (name === 'trkseg') {
        segment++;
        return;
      }
      if (name === 'trk') inTrack = true;
      if (name === 'wpt' || name === 'rtept') copy.details = true;
      path.push(name);
      let tag = `<${name}`;
      for (const key in attributes) {
        if (!key.startsWith('xmlns') && !key.includes(':')) tag += ` ${key}="${escapeXml(attributes[key]!)}"`;
      }
      emit(`${tag}>`);
    },
    close(name, text) {
      if (name === 'trkpt') {
        now.inPoint = false;
        now.good = false;
        return;
      }
      if (now.inPoint) {
        pointValue(name, text);
        return;
      }
      if (name === 'trkseg') return;
      if (name === 'trk') inTrack = false;
      if (name === 'name') {
        const parent = path.at(-2);
        if (parent === 'metadata') copy.details = true;
        if (title === '' && (parent === 'gpx' || (parent === 'trk' && inTrack))) title = text.trim().slice(0, 500);
      }
      if (path.at(-1) === name) path.pop();
      emit(`${text.trim() === '' ? '' : escapeXml(text)}</${name}>`);
    },
    damaged(damage) {
      log.note(
        'damaged',
        'serious',
        (n) => `Damaged at ${counted(n, 'place')}: ${damage.cause}; points half read there were left out`,
        { file: source.name, line: damage.line },
        now.inPoint && now.good ? 1 : 0,
      );
      if (now.inPoint && now.good) fixes.dropLast();
      now.inPoint = now.good = false;
      // What follows belongs to the document itself again.
      emit(path.slice(1).reduceRight((xml, name) => `${xml}</${name}>`, ''));
      path = path.slice(0, 1);
    },
  });
  // The last point may lack what came after the cut; it is kept when it has its time.
  const half = end.cutOff && now.inPoint && now.good && Number.isNaN(fixes.utcAt(fixes.count - 1));
  if (half) fixes.dropLast();
  noteXmlEnd(log, end, note, source.name, half ? 1 : 0);

  const waypoints: Waypoint[] = [];
  if (copy.details) {
    // gpxparser wants one well-formed document: close what a cut or a damage left open.
    const closed = path.reduceRight((xml, name) => `${xml}</${name}>`, slim);
    const { details: found, reason } = await readGpxDetails(closed);
    if (found === null) {
      log.note('waypoints-unread', 'info', () => `Waypoints and routes beside the track could not be read: ${reason}`);
    } else {
      title = found.title || title;
      for (const point of found.waypoints) {
        if (Math.abs(point.latDeg) <= 90 && Math.abs(point.lonDeg) <= 180) waypoints.push(point);
        else {
          log.note(
            'bad-waypoint',
            'info',
            (n) => `${counted(n, 'waypoint')} without a valid latitude and longitude left out`,
          );
        }
      }
    }
    if (copy.full) {
      log.note('waypoints-cut', 'info', () => 'More waypoints and routes than can be kept: the last are left out');
    }
  }
  return {
    name: source.name,
    format: 'gpx',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title,
    fixes: fixes.columns(),
    sensors: null,
    waypoints,
    columns: [],
    findings: log.findings(),
  };
}
