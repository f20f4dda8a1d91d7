import { describe, expect, it } from 'vitest';
import { recogniseHeader } from '../../../server/ingest/delimited/columns.ts';
import { previewFile } from '../../../server/ingest/index.ts';
import { codes, ingest, recordingOf, refusalOf, temporaryFile } from './support.ts';

const rows = (header: string, row: (i: number) => string, count = 20) =>
  `${[header, ...Array.from({ length: count }, (_, i) => row(i))].join('\n')}\n`;
const clock = (i: number) => `12:${String(Math.floor(i / 60)).padStart(2, '0')}:${String(i % 60).padStart(2, '0')}`;
const deg = (i: number) => (47 + i / 10_000).toFixed(6);

describe('headers', () => {
  it.each([
    ['Speed(km/h)', 'speedMps', 'km/h'],
    ['speed_mph', 'speedMps', 'mph'],
    ['GPS Speed [kn]', 'speedMps', 'kn'],
    ['speed_ms', 'speedMps', 'm/s'],
    ['Velocity', 'speedMps', ''],
    ['TrueHeading', 'courseRad', ''],
    ['Course over ground (deg)', 'courseRad', '°'],
    ['gps_lat', 'latDeg', ''],
    ['LATITUDE N/S', 'latDeg', ''],
    ['N/S', 'latHemisphere', ''],
    ['Lng', 'lonDeg', ''],
    ['timestamp_ms', 'utcS', 'ms'],
    ['time_utc', 'utcS', ''],
    [' HorizontalAccuracy(m)', 'accuracyM', 'm'],
    ['NSAT (USED/VIEW)', 'satellites', ''],
    ['position_type', 'fixQuality', ''],
    ['accelX(g)', 'accelX', 'g'],
    ['ay', 'accelY', ''],
    ['gyro_z_deg_s', 'gyroZ', '°/s'],
    ['yawrate', 'gyroZ', ''],
    ['Altitude (ft)', 'elevationM', 'ft'],
  ])('%s is %s in "%s"', (header, field, unit) => {
    expect(recogniseHeader(header)).toMatchObject({ field, unit });
  });

  it.each([
    'speed_source',
    'gyro_heading',
    'geom_latitude',
    'engine_rpm',
    'lateral_acc',
    'gps_heading_raw',
    'time_cst',
  ])('%s is nothing that is used', (header) => {
    expect(recogniseHeader(header)).toBeNull();
  });
});

describe('delimited text', () => {
  it('converts the unit of the header', async () => {
    for (const [unit, mps] of [
      ['km/h', 10],
      ['mph', 16.09344],
      ['kn', 18.52],
      ['m/s', 36],
    ] as const) {
      const { fixes, columns } = await recordingOf(
        rows(`time,lat,lon,speed (${unit})`, (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,36`),
      );
      expect(fixes.speedMps![3]).toBeCloseTo(mps, 4);
      expect(columns[3]).toEqual({ header: `speed (${unit})`, field: 'speedMps', unit, guessed: false });
    }
  });

  it('shows a unit that nobody stated as guessed', async () => {
    const { columns } = await recordingOf(
      rows('time,lat,lon,speed', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,10`),
    );
    expect(columns[3]).toEqual({ header: 'speed', field: 'speedMps', unit: 'm/s', guessed: true });
  });

  it('reads semicolons with decimal commas', async () => {
    const { fixes } = await recordingOf(
      rows(
        'Datum;Uhrzeit;Breite;Länge;Geschwindigkeit (km/h)',
        (i) => `17.05.2024;${clock(i)};${deg(i).replace('.', ',')};8,5;36,0`,
      ),
    );
    expect(fixes.latDeg[1]).toBe(47.0001);
    expect(fixes.speedMps![0]).toBeCloseTo(10, 6);
    expect(fixes.utcS[0]).toBe(Date.parse('2024-05-17T12:00:00Z') / 1000);
  });

  it.each([
    ['seconds', (i: number) => String(1_700_000_000 + i / 10)],
    ['milliseconds', (i: number) => String(1_700_000_000_000 + i * 100)],
    ['ISO', (i: number) => new Date(1_700_000_000_000 + i * 100).toISOString()],
    [
      'local with offset',
      (i: number) => `${new Date(1_700_000_000_000 + 3_600_000 + i * 100).toISOString().slice(0, -1)}+01:00`,
    ],
  ])('reads times as %s', async (_, time) => {
    const { fixes, findings } = await recordingOf(rows('timestamp,lat,lon', (i) => `${time(i)},${deg(i)},8.5`));
    expect(fixes.utcS[0]).toBe(1_700_000_000);
    expect(fixes.utcS[7]! - fixes.utcS[0]!).toBeCloseTo(0.7, 5);
    expect(findings).toEqual([]);
  });

  it('reads units inside cells and hemisphere columns', async () => {
    const { fixes } = await recordingOf(
      rows(
        'DATE,TIME,LATITUDE,N/S,LONGITUDE,E/W,SPEED,HEIGHT',
        (i) => `2008/05/04,${clock(i)}.000,33.${String(1000 + i)},S,70.5,W,36.0 km/h,100 ft`,
      ),
    );
    expect(fixes.latDeg[0]).toBe(-33.1);
    expect(fixes.lonDeg[0]).toBe(-70.5);
    expect(fixes.speedMps![0]).toBeCloseTo(10, 6);
    expect(fixes.elevationM![0]).toBeCloseTo(30.48, 4);
  });

  it.each([
    ['degrees and minutes', (i: number) => `4707.${String(1000 + i)},N,00830.0000,E`],
    ['degrees with a letter', (i: number) => `N47°07.${String(1000 + i)}′,N,8.5°E,E`],
    ['ten-millionths', (i: number) => `${String(471183333 + i)},N,85000000,E`],
  ])('reads positions as %s', async (_, place) => {
    const { fixes } = await recordingOf(rows('time,lat,N/S,lon,E/W', (i) => `2024-01-01T${clock(i)}Z,${place(i)}`));
    expect(fixes.latDeg[0]).toBeCloseTo(47 + 7.1 / 60, 6);
    expect(fixes.lonDeg[0]).toBeCloseTo(8.5, 6);
  });

  it('exchanges latitude and longitude that stand under each other’s heading, and says so', async () => {
    const recording = await recordingOf(rows('time,lat,lon', (i) => `2024-01-01T${clock(i)}Z,151.2,-33.8${String(i)}`));
    expect(recording.fixes.lonDeg[0]).toBe(151.2);
    expect(codes(recording)).toContain('ingest/swapped');
  });

  it('finds the header below a preamble, and units in the row after it', async () => {
    const { fixes, columns } = await recordingOf(
      `Made by a logger\nDriver,nobody\n\n${rows('time,lat,lon,speed', (i) => (i === 0 ? 'unix time,deg,deg,km/h' : `${String(1_700_000_000 + i)},${deg(i)},8.5,36`))}`,
    );
    expect(fixes.count).toBe(19);
    expect(fixes.speedMps![0]).toBeCloseTo(10, 6);
    expect(columns[3]!.unit).toBe('km/h');
    expect(fixes.row[0]).toBe(6);
  });

  it('reads quoted cells, doubled quotes and line ends inside quotes', async () => {
    const { fixes } = await recordingOf(
      rows('"note","time","lat","lon"', (i) => `"a ""b"", c\nd","2024-01-01T${clock(i)}Z","${deg(i)}","8.5"`),
    );
    expect(fixes.count).toBe(20);
    expect(fixes.latDeg[2]).toBe(47.0002);
  });

  it('loses only the damaged rows to an unpaired quote, counted', async () => {
    const text = rows('note,time,lat,lon', (i) => `${i === 7 ? '"open' : 'x'},2024-01-01T${clock(i)}Z,${deg(i)},8.5`);
    const recording = await recordingOf(text);
    const lost = recording.findings.reduce((total, { dropped }) => total + dropped, 0);
    expect(recording.fixes.count + lost).toBe(20);
    expect(recording.fixes.count).toBe(19);
  });

  it('counts rows that cannot be read and says where', async () => {
    const recording = await recordingOf(
      rows('time,lat,lon', (i) =>
        i === 4
          ? 'garbage'
          : i === 6
            ? `2024-01-01T${clock(i)}Z,95,8.5`
            : i === 8
              ? `never,${deg(i)},8.5`
              : `2024-01-01T${clock(i)}Z,${deg(i)},8.5`,
      ),
    );
    const counts = Object.fromEntries(
      recording.findings.map(({ code, dropped, places }) => [code, [dropped, places[0]!.line]]),
    );
    expect(counts).toEqual({ 'ingest/bad-row': [1, 6], 'ingest/bad-position': [1, 8], 'ingest/bad-time': [0, 10] });
    expect(recording.fixes.count).toBe(18);
  });

  it('lists the columns found when latitude, longitude or time cannot be told', async () => {
    const fault = await refusalOf(rows('when,ycoord,xcoord', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5`));
    expect(fault.code).toBe('ingest/columns-unknown');
    expect(fault.cause).toContain('"when", "ycoord", "xcoord"');
  });

  it('takes columns named by hand, with their unit', async () => {
    const text = rows('when,ycoord,xcoord,fast', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,36`);
    const { fixes } = await recordingOf(text, {
      columns: {
        time: { header: 'when' },
        latitude: { header: 'ycoord' },
        lonDeg: { header: 'XCOORD' },
        speed: { header: 'fast', unit: 'km/h' },
      },
    });
    expect(fixes.speedMps![0]).toBeCloseTo(10, 6);
    expect((await refusalOf(text, { columns: { time: { header: 'absent' } } })).code).toBe('ingest/unknown-column');
    expect((await refusalOf(text, { columns: { warp: { header: 'fast' } } })).code).toBe('ingest/unknown-field');
    expect((await refusalOf(text, { columns: { speed: { header: 'fast', unit: 'parsec' } } })).code).toBe(
      'ingest/unknown-unit',
    );
  });

  it('keeps inertial channels in SI units, their unit judged by size where none is stated', async () => {
    const { sensors, columns } = await recordingOf(
      rows(
        'time,lat,lon,ax,ay,az,gyro_z',
        (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,0.01,0.1,1.0,${String(10 * Math.sin(i))}`,
      ),
    );
    // 1 g is 9.80665 m/s² exactly (3rd CGPM, 1901).
    expect(sensors!.accelY![3]).toBeCloseTo(0.980665, 6);
    expect(sensors!.gyroZ![1]).toBeCloseTo((10 * Math.sin(1) * Math.PI) / 180, 6);
    expect(columns[4]).toMatchObject({ field: 'accelY', unit: 'g', guessed: true });
    const si = await recordingOf(
      rows('time,lat,lon,ax,ay,az', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,0.1,0.98,9.8`),
    );
    expect(si.sensors!.accelY![0]).toBeCloseTo(0.98, 6);
  });

  it('makes fixes of new positions only when a sensor log repeats the last one', async () => {
    const recording = await recordingOf(
      rows(
        'timestamp,lat,lon,ax',
        (i) => `${String(1_700_000_000_000 + 20 * i)},${deg(10 * Math.floor(i / 10))},8.5,0.1`,
        200,
      ),
    );
    expect(recording.fixes.count).toBe(20);
    expect(recording.sensors!.count).toBe(200);
    const held = recording.findings.find(({ code }) => code === 'ingest/held-positions')!;
    expect(held.dropped).toBe(180);
  });

  it.each(['\n', '\r\n', '\r'])('reads lines that end with %j', async (end) => {
    const text = rows('time,lat,lon,note', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,x`).replaceAll('\n', end);
    const { fixes } = await recordingOf(text);
    expect([fixes.count, fixes.row[5]]).toEqual([20, 7]);
  });

  it('reads the same from UTF-8, UTF-16 and Latin-1', async () => {
    const text = rows('time,lat,lon,größe', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5,é`);
    const expected = [...(await recordingOf(text)).fixes.latDeg];
    for (const [content, encoding] of [
      [Buffer.from(text, 'latin1'), 'ISO-8859-1'],
      [Buffer.from(`\ufeff${text}`, 'utf16le'), 'UTF-16LE'],
      [Buffer.from(text, 'utf16le'), 'UTF-16LE'],
      [Buffer.from(`\ufeff${text}`), 'UTF-8'],
    ] as const) {
      const recording = await recordingOf(content);
      expect([...recording.fixes.latDeg]).toEqual(expected);
      expect(recording.encoding).toBe(encoding);
      expect(recording.columns[3]!.header).toBe('größe');
    }
  });

  it('takes vehicles of an identity column for segments', async () => {
    const { fixes } = await recordingOf(
      rows('vehicle_id,time,lat,lon', (i) => `${i % 2 === 0 ? 'A' : 'B'},2024-01-01T${clock(i)}Z,${deg(i)},8.5`),
    );
    expect([...fixes.segment.slice(0, 4)]).toEqual([0, 1, 0, 1]);
  });

  it('shows columns, headers and first rows before anything is analysed', async () => {
    const path = temporaryFile(rows('time;lat;lon;speed (kn)', (i) => `2024-01-01T${clock(i)}Z;${deg(i)};8.5;7`, 100));
    const preview = (await previewFile(path, 'x.csv'))!;
    expect(preview.headers).toEqual(['time', 'lat', 'lon', 'speed (kn)']);
    expect(preview.columns.map(({ field }) => field)).toEqual(['utcS', 'latDeg', 'lonDeg', 'speedMps']);
    expect(preview.rows).toHaveLength(20);
    expect(preview.rows[1]).toEqual(['2024-01-01T12:00:01Z', '47.000100', '8.5', '7']);
    expect(preview.fault).toBeNull();
    const unknown = (await previewFile(temporaryFile('a;b\n1;2\n3;4\n'), 'y.csv'))!;
    expect(unknown.fault!.code).toBe('ingest/columns-unknown');
    expect(await previewFile(temporaryFile('<gpx></gpx>'), 'z.gpx')).toBeNull();
  });

  it('reports progress in bytes', async () => {
    const seen: number[] = [];
    const text = rows('time,lat,lon', (i) => `2024-01-01T${clock(i)}Z,${deg(i)},8.5`, 3000);
    await ingest(text, { onProgress: (read, total) => seen.push(read / total) });
    expect(seen.at(-1)).toBe(1);
  });
});
