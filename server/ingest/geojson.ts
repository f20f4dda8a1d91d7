import { BendbookError } from '../../shared/model/fault.ts';
import type { Recording, Waypoint } from '../../shared/model/recording.ts';
import { readAll, type ByteSource } from './byte-source.ts';
import { decimal } from './decimal.ts';
import { detectEncoding, ENCODING_NAMES } from './encoding.ts';
import { counted, FindingLog } from './finding-log.ts';
import { courseFromDegrees, FixBuilder, wrapLongitude } from './fix-builder.ts';
import type { ReadContext } from './options.ts';
import { parseIso, type Stamp } from './timestamp.ts';

/** The whole document is held while it is read. */
const MAX_BYTES = 256 << 20;
const MAX_GEOMETRY_DEPTH = 4;

type Json = Record<string, unknown>;
const isObject = (value: unknown): value is Json =>
  typeof value === 'object' && value !== null && !Array.isArray(value);
const listOf = (value: unknown): readonly unknown[] => (Array.isArray(value) ? value : []);

const number = (value: unknown): number =>
  typeof value === 'number' ? value : typeof value === 'string' ? decimal(value) : NaN;

/** Property under the first of several names, whatever their case. */
function property(properties: Json, names: readonly string[]): unknown {
  for (const key of Object.keys(properties)) if (names.includes(key.toLowerCase())) return properties[key];
  return undefined;
}

/**
 * GeoJSON: lines with a time for each coordinate (`coordTimes`, `times`, also under `coordinateProperties`), and
 * point features with a time property, in order. Points without a time are waypoints.
 * Source: RFC 7946; times of coordinates by common practice.
 */
export async function readGeoJson(source: ByteSource, context: ReadContext): Promise<Recording> {
  const bytes = await readAll(source, MAX_BYTES);
  const encoding = detectEncoding(bytes);
  let document: unknown;
  try {
    document = JSON.parse(new TextDecoder(encoding, { fatal: true }).decode(bytes));
  } catch (error) {
    const at = /position (\d+)/.exec(String(error))?.[1];
    throw new BendbookError(
      'ingest/damaged',
      {
        cause: `The GeoJSON text is damaged or cut off: ${error instanceof Error ? withoutExcerpt(error.message) : ''}`,
        place: { file: source.name, ...(at === undefined ? {} : { byte: Number(at) }) },
        remedy: 'Export the log again',
      },
      { cause: error },
    );
  }
  const log = new FindingLog('ingest');
  const fixes = new FixBuilder(source.name, context.maxFixes);
  const waypoints: Waypoint[] = [];
  const stamp: Stamp = { utcS: NaN, zoned: false };
  let segment = 0;
  let title = '';

  const timeOf = (value: unknown): number => {
    if (typeof value === 'string') {
      const iso = parseIso(value.trim(), stamp);
      return Number.isNaN(iso) ? epoch(decimal(value)) : iso;
    }
    return typeof value === 'number' ? epoch(value) : NaN;
  };
  const add = (coordinates: unknown, utcS: number, row: number): boolean => {
    const [x, y, z] = listOf(coordinates);
    const lon = wrapLongitude(number(x));
    const lat = number(y);
    if (!(Math.abs(lat) <= 90) || Number.isNaN(lon)) {
      log.note(
        'bad-position',
        'warning',
        (n) => `${counted(n, 'point')} without a valid latitude and longitude left out`,
        { file: source.name, line: row },
        1,
      );
      return false;
    }
    fixes.add(utcS, lat, lon, segment, row);
    const height = number(z);
    if (Number.isFinite(height)) fixes.set('elevationM', height);
    return true;
  };
  const line = (coordinates: unknown, times: readonly unknown[], row: number): void => {
    listOf(coordinates).forEach((place, i) => {
      const utcS = timeOf(times[i]);
      if (times.length > 0 && Number.isNaN(utcS)) {
        log.note('bad-time', 'warning', (n) => `${counted(n, 'point')} with a time that cannot be read`, {
          file: source.name,
          line: row,
        });
      }
      add(place, utcS, row);
    });
    segment++;
  };
  const point = (coordinates: unknown, properties: Json, row: number): void => {
    const utcS = timeOf(property(properties, ['time', 'timestamp', 'datetime', 'date_time', 'date', 'utc', 'when']));
    if (Number.isNaN(utcS)) {
      const [x, y] = listOf(coordinates).map(number);
      const name = property(properties, ['name', 'title', 'id']);
      if (Math.abs(y ?? NaN) <= 90 && Math.abs(x ?? NaN) <= 180) {
        waypoints.push({ name: typeof name === 'string' ? name.slice(0, 500) : '', latDeg: y!, lonDeg: x! });
      }
      return;
    }
    if (!add(coordinates, utcS, row)) return;
    const speed = number(property(properties, ['speed', 'velocity', 'speed_mps', 'gps_speed']));
    if (speed >= 0 && speed < 1e4) fixes.set('speedMps', speed);
    const course = courseFromDegrees(number(property(properties, ['course', 'heading', 'bearing', 'cog'])));
    if (!Number.isNaN(course)) fixes.set('courseRad', course);
    const accuracy = number(property(properties, ['accuracy', 'horizontal_accuracy', 'hacc']));
    if (accuracy >= 0) fixes.set('accuracyM', accuracy);
  };
  const geometry = (value: unknown, properties: Json, row: number, depth: number): void => {
    if (!isObject(value)) return;
    const nested = isObject(properties.coordinateProperties) ? properties.coordinateProperties : {};
    const times = listOf(properties.coordTimes ?? properties.times ?? nested.times ?? nested.coordTimes);
    switch (value.type) {
      case 'Point':
        point(value.coordinates, properties, row);
        return;
      case 'MultiPoint':
      case 'LineString':
        line(value.coordinates, times, row);
        return;
      case 'MultiLineString':
        listOf(value.coordinates).forEach((part, i) => {
          line(part, Array.isArray(times[i]) ? listOf(times[i]) : [], row);
        });
        return;
      case 'GeometryCollection':
        if (depth < MAX_GEOMETRY_DEPTH) {
          for (const part of listOf(value.geometries)) geometry(part, properties, row, depth + 1);
        }
    }
  };
  const feature = (value: unknown, row: number): void => {
    if (!isObject(value)) return;
    const properties = isObject(value.properties) ? value.properties : {};
    if (title === '' && typeof properties.name === 'string') title = properties.name.slice(0, 500);
    if (value.type === 'Feature') geometry(value.geometry, properties, row, 0);
    else geometry(value, {}, row, 0);
  };
  if (isObject(document) && document.type === 'FeatureCollection') {
    listOf(document.features).forEach((value, i) => {
      feature(value, i + 1);
    });
  } else feature(document, 1);
  return {
    name: source.name,
    format: 'geojson',
    bytes: source.bytes,
    encoding: ENCODING_NAMES[encoding],
    title,
    fixes: fixes.columns(),
    sensors: null,
    waypoints,
    columns: [],
    findings: log.findings(),
  };
}

/** Seconds since 1970 from a number of seconds or milliseconds; NaN when it is neither by its size. */
function epoch(value: number): number {
  if (value > 3.1e8 && value < 4.2e9) return value;
  return value > 3.1e11 && value < 4.2e12 ? value / 1000 : NaN;
}

/** The engine's message without the piece of the file that it quotes. */
function withoutExcerpt(message: string): string {
  return message.replace(/,\s*"?\.{3}[\s\S]*$|,\s*"[\s\S]*$/, '');
}
