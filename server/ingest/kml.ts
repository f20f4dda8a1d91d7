import type { Recording, Waypoint } from '../../shared/model/recording.ts';
import type { ByteSource } from './byte-source.ts';
import { decimal } from './decimal.ts';
import { ENCODING_NAMES, type TextNote } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { courseFromDegrees, FixBuilder, wrapLongitude } from './fix-builder.ts';
import type { ReadContext } from './options.ts';
import { parseIso, type Stamp } from './timestamp.ts';
import { noteXmlEnd } from './xml-findings.ts';
import { readXml } from './xml-stream.ts';

interface Place {
  readonly lon: number;
  readonly lat: number;
  readonly height: number;
}

/** `lon,lat[,height]` or, in a track, `lon lat height`. */
function placeFrom(text: string, separator: RegExp): Place | null {
  const parts = text.trim().split(separator);
  const lon = wrapLongitude(decimal(parts[0] ?? ''));
  const lat = decimal(parts[1] ?? '');
  if (!(Math.abs(lat) <= 90) || Number.isNaN(lon)) return null;
  return { lon, lat, height: decimal(parts[2] ?? '') };
}

/** Arrays of extended data in a track that are kept: name as exporters write it, to what is set. */
const ARRAYS: Record<string, 'speed' | 'course' | 'accuracy'> = {
  speed: 'speed',
  bearing: 'course',
  heading: 'course',
  course: 'course',
  accuracy: 'accuracy',
};

/**
 * KML: tracks (times and places in two lists, matched by order), placemarks of a point with a time, and lines
 * (points without times). Placemarks of a point without a time are waypoints.
 * Source: OGC 12-007r2 KML 2.3, Track and MultiTrack; the older extension in the `gx` namespace is read alike.
 */
export async function readKml(source: ByteSource, context: ReadContext): Promise<Recording> {
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  // A file of tracks often repeats them as a drawn line and marks their ends: these count only without a track.
  const drawn = new FixBuilder(source.name, context.maxFixes);
  const marks: { name: string; utcS: number; place: Place; line: number }[] = [];
  const note: TextNote = { encoding: 'utf-8', replaced: 0 };
  const stamp: Stamp = { utcS: NaN, zoned: false };
  const waypoints: Waypoint[] = [];
  let title = '';
  let segment = 0;
  // The track being read: times and places come in two lists.
  const now = { inTrack: false };
  let trackFirst = 0;
  let whens: number[] = [];
  let coords: { place: Place | null; empty: boolean; line: number }[] = [];
  let arrays: Partial<Record<'speed' | 'course' | 'accuracy', number[]>> = {};
  let array: number[] | null = null;
  let line = 0;
  // The placemark being read.
  let markName = '';
  let markTime = NaN;
  let inMark = false;
  const path: string[] = [];

  const time = (text: string): number => {
    const trimmed = text.trim();
    // A date alone is midnight, as KML has it.
    const utcS = parseIso(/^\d{4}-\d\d-\d\d$/.test(trimmed) ? `${trimmed}T00:00Z` : trimmed, stamp);
    if (Number.isNaN(utcS)) {
      log.note('bad-time', 'warning', (n) => `${counted(n, 'point')} with a time that cannot be read`, {
        file: source.name,
        line,
      });
    }
    return utcS;
  };
  const bad = (at: number, count = 1) => {
    log.note(
      'bad-position',
      'warning',
      (n) => `${counted(n, 'point')} without a valid latitude and longitude left out`,
      { file: source.name, line: at },
      count,
      count,
    );
  };
  const add = (utcS: number, place: Place, at: number, to = fixes): void => {
    to.add(utcS, place.lat, place.lon, segment, at);
    if (!Number.isNaN(place.height)) to.set('elevationM', place.height);
  };

  const endTrack = (): void => {
    now.inTrack = false;
    coords.forEach(({ place, empty, line: at }, i) => {
      if (place === null) {
        if (!empty) bad(at);
        return;
      }
      add(whens[i] ?? NaN, place, at);
      const speed = arrays.speed?.[i] ?? NaN;
      if (speed >= 0 && speed < 1e4) fixes.set('speedMps', speed);
      const course = courseFromDegrees(arrays.course?.[i] ?? NaN);
      if (!Number.isNaN(course)) fixes.set('courseRad', course);
      const accuracy = arrays.accuracy?.[i] ?? NaN;
      if (accuracy >= 0) fixes.set('accuracyM', accuracy);
    });
    if (whens.length !== coords.length) {
      log.note(
        'unequal-lists',
        'serious',
        () => `A track has ${whens.length} times and ${coords.length} places: they are matched from the start`,
        { file: source.name, line: trackFirst },
      );
    }
    segment++;
    whens = [];
    coords = [];
    arrays = {};
  };

  const end = await readXml(source, note, /<(?:\w+:)?(?:Placemark|Track)[\s/>]/, {
    open(name, attributes, at) {
      line = at;
      path.push(name);
      if (name === 'Track') {
        now.inTrack = true;
        trackFirst = at;
        whens = [];
        coords = [];
        arrays = {};
      } else if (name === 'Placemark') {
        inMark = true;
        markName = '';
        markTime = NaN;
      } else if (now.inTrack && name === 'SimpleArrayData') {
        const kept = ARRAYS[(attributes.name ?? '').toLowerCase()];
        array = kept === undefined ? null : (arrays[kept] = []);
      }
    },
    close(name, text) {
      path.pop();
      const parent = path.at(-1);
      switch (name) {
        case 'Track':
          endTrack();
          return;
        case 'when':
          if (now.inTrack && parent === 'Track') whens.push(time(text));
          else if (parent === 'TimeStamp' && inMark) markTime = time(text);
          return;
        case 'coord':
          if (now.inTrack) coords.push({ place: placeFrom(text, /\s+/), empty: text.trim() === '', line });
          return;
        case 'value':
          array?.push(decimal(text));
          return;
        case 'SimpleArrayData':
          array = null;
          return;
        case 'Placemark':
          inMark = false;
          return;
        case 'name':
          if (parent === 'Placemark') markName = text.trim().slice(0, 500);
          if (title === '' && (parent === 'Document' || parent === 'Placemark')) title = text.trim().slice(0, 500);
          return;
        case 'coordinates': {
          if (parent === 'Point') {
            const place = placeFrom(text, /\s*,\s*/);
            if (place === null) bad(line);
            else if (!Number.isNaN(markTime) && marks.length < context.maxFixes) {
              marks.push({ name: markName, utcS: markTime, place, line });
            } else waypoints.push({ name: markName, latDeg: place.lat, lonDeg: place.lon });
          } else if (parent === 'LineString') {
            for (const piece of text.trim().split(/\s+/)) {
              if (piece === '') continue;
              const place = placeFrom(piece, /,/);
              if (place === null) bad(line);
              else add(NaN, place, line, drawn);
            }
            segment++;
          }
        }
      }
    },
    damaged(damage) {
      const lost = now.inTrack ? coords.length : 0;
      log.note(
        'damaged',
        'serious',
        (n) => `Damaged at ${counted(n, 'place')}: ${damage.cause}; the track half read there was left out`,
        { file: source.name, line: damage.line },
        lost,
      );
      now.inTrack = inMark = false;
      whens = [];
      coords = [];
      path.length = 0;
    },
  });
  // A track cut off by the end of the file keeps what it has.
  if (now.inTrack) endTrack();
  const hasTracks = fixes.count > 0;
  for (const { name, utcS, place, line: at } of marks) {
    if (hasTracks) waypoints.push({ name, latDeg: place.lat, lonDeg: place.lon });
    else add(utcS, place, at);
  }
  noteXmlEnd(log, end, note, source.name, 0);
  return {
    name: source.name,
    format: 'kml',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[note.encoding],
    title,
    fixes: (fixes.count > 0 ? fixes : drawn).columns(),
    sensors: null,
    waypoints,
    columns: [],
    findings: log.findings(),
  };
}
