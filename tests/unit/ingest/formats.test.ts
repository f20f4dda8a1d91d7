import { readFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import type { FixColumns } from '../../../shared/model/recording.ts';
import { fitBytes, syntheticSeeds } from '../../bench/mutation-seeds.ts';
import { hasRecordings, RECORDINGS } from '../../support/shared.ts';
import { codes, ingest, recordingOf, refusalOf } from './support.ts';

const seeds = new Map(syntheticSeeds().map(({ name, bytes }) => [name, bytes]));
const columnsOf = ({ utcS, latDeg, lonDeg }: FixColumns) => ({ utcS, latDeg, lonDeg });

describe('one run written in every format', () => {
  it.each(['tcx', 'kml', 'geojson', 'igc', 'fit'])('%s gives its places and times', async (name) => {
    const { fixes, format } = await recordingOf(seeds.get(name)!);
    expect(format).toBe(name);
    expect(fixes.count).toBeGreaterThanOrEqual(60);
    // Steps of the formats: FIT 8e-8 degrees, IGC a thousandth of a minute.
    const step = name === 'igc' ? 1 / 60_000 : 1e-7;
    for (let i = 0; i < 60; i++) {
      expect(Math.abs(fixes.latDeg[i]! - (10 + i / 5000))).toBeLessThanOrEqual(step);
      expect(Math.abs(fixes.lonDeg[i]! - (-20 + i / 4000))).toBeLessThanOrEqual(step);
      if (name !== 'igc') expect(fixes.utcS[i]).toBe(1_700_000_000 + i);
      expect(fixes.elevationM![i]).toBeCloseTo(100 + i, 3);
    }
    if (name === 'igc') expect(fixes.utcS[0]).toBe(Date.parse('2024-01-01T12:00:00Z') / 1000);
    if (name === 'tcx' || name === 'fit') expect(fixes.speedMps![3]).toBe(20.5);
  });

  it('GPX, CSV, quoted CSV, semicolons, UTF-16 and gzip agree to the digits written', async () => {
    const { fixes } = await recordingOf(seeds.get('csv')!);
    for (const name of ['csv quoted', 'csv semicolons', 'csv utf-16', 'gzip']) {
      expect(columnsOf((await recordingOf(seeds.get(name)!)).fixes)).toEqual(columnsOf(fixes));
    }
    for (const name of ['gpx', 'nmea']) {
      const other = (await recordingOf(seeds.get(name)!)).fixes;
      expect([...other.utcS]).toEqual([...fixes.utcS]);
      for (let i = 0; i < fixes.count; i++) {
        expect(Math.abs(other.latDeg[i]! - fixes.latDeg[i]!)).toBeLessThan(2e-7);
        expect(Math.abs(other.lonDeg[i]! - fixes.lonDeg[i]!)).toBeLessThan(2e-7);
      }
    }
  });

  it('tells formats by content whatever the file is called', async () => {
    for (const [name, bytes] of seeds) {
      const { format } = await recordingOf(bytes, { name: 'photo.jpg' });
      expect(name.startsWith(format) || name === 'gzip').toBe(true);
    }
  });
});

describe('FIT', () => {
  it('keeps the records of a file that was cut off', async () => {
    const whole = fitBytes();
    const recording = await recordingOf(whole.subarray(0, Math.floor(0.6 * whole.length)));
    expect(recording.fixes.count).toBeGreaterThan(30);
    expect(recording.fixes.count).toBeLessThan(40);
    expect(codes(recording)).toContain('ingest/cut-off');
  });

  it('says when the checksum is wrong', async () => {
    const bytes = fitBytes().slice();
    bytes[200]! ^= 1;
    expect(codes(await recordingOf(bytes))).toContain('ingest/damaged');
  });

  it('reads a chain of two files as two segments', async () => {
    const recording = await recordingOf(Buffer.concat([fitBytes(10), fitBytes(10)]));
    expect([...recording.fixes.segment]).toEqual([...Array<number>(10).fill(0), ...Array<number>(10).fill(1)]);
  });

  it.skipIf(!hasRecordings)('takes course and UTC of a camera from the receiver’s own messages', async () => {
    const { fixes } = await recordingOf(readFileSync(`${RECORDINGS}road/us_virb_car.fit`));
    expect(fixes.courseRad).not.toBeNull();
    // The camera's file says it was created on 28 June 2017, 02:33:04 UTC; its records count from 1989.
    expect(new Date(1000 * fixes.utcS[0]!).toISOString().slice(0, 10)).toBe('2017-06-28');
  });
});

describe('KML', () => {
  const kml = (body: string) => `<kml xmlns:gx="x"><Document>${body}</Document></kml>`;
  const whens = (n: number) =>
    Array.from({ length: n }, (_, i) => `<when>2024-01-01T00:00:0${String(i)}Z</when>`).join('');

  it('matches times and places by order, empty places included', async () => {
    // Source: OGC 12-007r2 KML 2.3, 9.14: the n-th time belongs to the n-th place.
    const { fixes } = await recordingOf(
      kml(
        `<Placemark><gx:Track>${whens(3)}<gx:coord/><gx:coord>8 47 1</gx:coord><gx:coord>8.1 47 1</gx:coord></gx:Track></Placemark>`,
      ),
    );
    expect([...fixes.utcS].map((s) => s % 60)).toEqual([1, 2]);
  });

  it('says when there are more times than places', async () => {
    const recording = await recordingOf(
      kml(`<gx:Track>${whens(3)}<gx:coord>8 47 1</gx:coord><gx:coord>8.1 47 1</gx:coord></gx:Track>`),
    );
    expect(codes(recording)).toContain('ingest/unequal-lists');
  });

  it('reads placemarks with a time as fixes, and as marks where there is a track', async () => {
    const mark = (s: number) =>
      `<Placemark><name>m${String(s)}</name><TimeStamp><when>2024-01-01T00:00:0${String(s)}Z</when></TimeStamp><Point><coordinates>8.${String(s)},47,5</coordinates></Point></Placemark>`;
    expect((await recordingOf(kml(mark(1) + mark(2) + mark(3)))).fixes.count).toBe(3);
    const both = await recordingOf(
      kml(`${mark(1)}<gx:Track>${whens(2)}<gx:coord>8 47 1</gx:coord><gx:coord>8.1 47 1</gx:coord></gx:Track>`),
    );
    expect([both.fixes.count, both.waypoints.map(({ name }) => name)]).toEqual([2, ['m1']]);
  });

  it('keeps speed, bearing and accuracy of the extended data', async () => {
    const data = (name: string, values: number[]) =>
      `<gx:SimpleArrayData name="${name}">${values.map((v) => `<gx:value>${String(v)}</gx:value>`).join('')}</gx:SimpleArrayData>`;
    const { fixes } = await recordingOf(
      kml(
        `<gx:Track>${whens(2)}<gx:coord>8 47 1</gx:coord><gx:coord>8.1 47 1</gx:coord><ExtendedData><SchemaData>${data('speed', [3, 4])}${data('bearing', [90, 180])}${data('accuracy', [5, 6])}</SchemaData></ExtendedData></gx:Track>`,
      ),
    );
    expect([...fixes.speedMps!, ...fixes.accuracyM!]).toEqual([3, 4, 5, 6]);
    expect(fixes.courseRad![1]).toBeCloseTo(Math.PI, 6);
  });
});

describe('GeoJSON', () => {
  it('reads the times of each part of a line, and of coordinateProperties', async () => {
    const times = ['2024-01-01T00:00:00Z', '2024-01-01T00:00:01Z'];
    const lines = [
      [
        [8, 47],
        [8.1, 47],
      ],
      [
        [8.2, 47],
        [8.3, 47],
      ],
    ];
    const multi = {
      type: 'Feature',
      geometry: { type: 'MultiLineString', coordinates: lines },
      properties: { coordTimes: [times, times] },
    };
    expect((await recordingOf(JSON.stringify(multi))).fixes.count).toBe(4);
    const nested = {
      type: 'Feature',
      geometry: { type: 'LineString', coordinates: lines[0] },
      properties: { coordinateProperties: { times } },
    };
    expect((await recordingOf(JSON.stringify(nested))).fixes.utcS[1]).toBe(1_704_067_201);
  });

  it('refuses damaged text with a code, and survives nesting without end', async () => {
    const whole = new TextDecoder().decode(seeds.get('geojson'));
    expect((await refusalOf(whole.slice(0, 500))).code).toBe('ingest/damaged');
    const deep = `{"type":"Feature","geometry":${'{"type":"GeometryCollection","geometries":['.repeat(2000)}`;
    expect((await refusalOf(deep)).code).toBe('ingest/damaged');
  });
});

describe('IGC', () => {
  it('reads the example of the specification', async () => {
    // Source: FAI IGC flight recorder specification, appendix A, section 4.1: B1602405407121N00249342WA0028000421
    // is 16:02:40 UTC, 54° 07.121' N, 2° 49.342' W, pressure altitude 280 m, GNSS altitude 421 m.
    const { fixes } = await recordingOf(
      'AXXXABC\r\nHFDTE160701\r\nB1602405407121N00249342WA0028000421\r\nB1602455107126N00149300WA0028800429\r\n',
    );
    expect(fixes.utcS[0]).toBe(Date.parse('2001-07-16T16:02:40Z') / 1000);
    expect(fixes.latDeg[0]).toBeCloseTo(54 + 7.121 / 60, 10);
    expect(fixes.lonDeg[0]).toBeCloseTo(-(2 + 49.342 / 60), 10);
    expect(fixes.elevationM![0]).toBe(421);
  });

  it('counts the day on over midnight and keeps announced decimal seconds', async () => {
    const { fixes } = await recordingOf(
      'AXXX\r\nHFDTEDATE:311224,01\r\nI013637TDS\r\nB2359595407121N00249342WA002800042150\r\nB0000015407121N00249342WA002800042125\r\n',
    );
    expect(fixes.utcS[0]).toBeCloseTo(Date.parse('2024-12-31T23:59:59.5Z') / 1000, 6);
    expect(fixes.utcS[1]).toBeCloseTo(Date.parse('2025-01-01T00:00:01.25Z') / 1000, 6);
  });
});

describe('gzip', () => {
  it('refuses a bomb, and damage, with their codes', async () => {
    expect((await refusalOf(gzipSync(Buffer.concat([seeds.get('csv')!, Buffer.alloc(80 << 20, '\n')])))).code).toBe(
      'ingest/archive-too-large',
    );
    const whole = gzipSync(seeds.get('csv')!);
    const cut = whole.subarray(0, whole.length >> 1);
    expect((await refusalOf(cut)).code).toBe('ingest/damaged-archive');
  });

  it('opens archives in archives only so deep', async () => {
    const once = gzipSync(seeds.get('csv')!);
    expect((await recordingOf(gzipSync(once))).fixes.count).toBe(60);
    const { refused } = await ingest(gzipSync(gzipSync(once)));
    expect(refused[0]!.fault.code).toBe('ingest/nested-archive');
  });
});
