import { gzipSync } from 'node:zlib';
import { FitEncoder } from 'fit-file-parser/encoder';
import { csvText, gpxText, nmeaText } from './ingest.ts';
import type { Seed } from './mutations.ts';

const POINTS = 60;
const text = (name: string, content: string): Seed => ({ name, bytes: new TextEncoder().encode(content) });

const place = (i: number) => ({ lat: 10 + i / 5000, lon: -20 + i / 4000, ele: 100 + i });
const time = (i: number) => new Date(1_700_000_000_000 + 1000 * i).toISOString();

function tcxText(): string {
  const points = Array.from({ length: POINTS }, (_, i) => {
    const { lat, lon, ele } = place(i);
    return `<Trackpoint><Time>${time(i)}</Time><Position><LatitudeDegrees>${lat}</LatitudeDegrees><LongitudeDegrees>${lon}</LongitudeDegrees></Position><AltitudeMeters>${ele}</AltitudeMeters><Extensions><TPX><Speed>20.5</Speed></TPX></Extensions></Trackpoint>`;
  });
  return `<?xml version="1.0"?><TrainingCenterDatabase><Activities><Activity Sport="Other"><Lap><Track>${points.join('\n')}</Track></Lap></Activity></Activities></TrainingCenterDatabase>`;
}

function kmlText(): string {
  const each = (line: (i: number) => string) => Array.from({ length: POINTS }, (_, i) => line(i)).join('\n');
  return `<?xml version="1.0"?><kml xmlns:gx="x"><Document><Placemark><name>t</name><gx:Track>${each((i) => `<when>${time(i)}</when>`)}${each(
    (i) => `<gx:coord>${place(i).lon} ${place(i).lat} ${place(i).ele}</gx:coord>`,
  )}</gx:Track></Placemark></Document></kml>`;
}

function geoJsonText(): string {
  const coordinates = Array.from({ length: POINTS }, (_, i) => [place(i).lon, place(i).lat, place(i).ele]);
  const coordTimes = Array.from({ length: POINTS }, (_, i) => time(i));
  const point = {
    type: 'Feature',
    geometry: { type: 'Point', coordinates: [-20, 10] },
    properties: { time: time(99), speed: 3 },
  };
  return JSON.stringify({
    type: 'FeatureCollection',
    features: [{ type: 'Feature', geometry: { type: 'LineString', coordinates }, properties: { coordTimes } }, point],
  });
}

function igcText(): string {
  const digits = (value: number, width: number) => String(Math.round(value)).padStart(width, '0');
  const fixes = Array.from({ length: POINTS }, (_, i) => {
    const { lat, lon, ele } = place(i);
    const angle = (degrees: number, width: number) => {
      const whole = Math.floor(Math.abs(degrees));
      return digits(whole, width) + digits(Math.min(59_999, (Math.abs(degrees) - whole) * 60_000), 5);
    };
    return `B1200${digits(i, 2)}${angle(lat, 2)}N${angle(lon, 3)}WA${digits(ele, 5)}${digits(ele, 5)}010`;
  });
  return `AXXX001\r\nHFDTE010124\r\nI013638FXA\r\n${fixes.join('\r\n')}\r\n`;
}

/** A FIT activity of records with time, place, height and speed, by the encoder of the library. */
export function fitBytes(points = POINTS): Uint8Array {
  const encoder = new FitEncoder({ protocolVersion: 0x20 });
  const semicircles = (degrees: number) => Math.round((degrees * 2 ** 31) / 180);
  const [UINT16, SINT32, UINT32] = [0x84, 0x85, 0x86];
  for (let i = 0; i < points; i++) {
    const { lat, lon, ele } = place(i);
    encoder.writeMessage(20, [
      { number: 253, size: 4, baseType: UINT32, value: 1_700_000_000 + i - 631_065_600 },
      { number: 0, size: 4, baseType: SINT32, value: semicircles(lat) },
      { number: 1, size: 4, baseType: SINT32, value: semicircles(lon) },
      { number: 2, size: 2, baseType: UINT16, value: Math.round((ele + 500) * 5) },
      { number: 6, size: 2, baseType: UINT16, value: 20_500 },
    ]);
  }
  return encoder.close();
}

/** One small invented log of every format, text formats in several notations, and a packed one. */
export function syntheticSeeds(): Seed[] {
  const csv = csvText(POINTS);
  const gpx = gpxText(POINTS);
  return [
    text('gpx', gpx),
    text('gpx with waypoint', gpx.replace('<trk>', '<wpt lat="1" lon="2"><name>w &amp; x</name></wpt><trk>')),
    text('nmea', nmeaText(POINTS)),
    text('csv', csv),
    text('csv quoted', csv.replace(/[^,\n]+/g, '"$&"')),
    text('csv semicolons', csv.replaceAll(',', ';').replaceAll('.', ',')),
    { name: 'csv utf-16', bytes: Buffer.from(`\ufeff${csv}`, 'utf16le') },
    text('tcx', tcxText()),
    text('kml', kmlText()),
    text('geojson', geoJsonText()),
    text('igc', igcText()),
    { name: 'fit', bytes: fitBytes() },
    { name: 'gzip', bytes: gzipSync(csv) },
  ];
}
