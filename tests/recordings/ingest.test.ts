import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { cleanRecording } from '../../server/clean/index.ts';
import { memorySource } from '../../server/ingest/byte-source.ts';
import { readGpx } from '../../server/ingest/gpx.ts';
import { ingestFile } from '../../server/ingest/index.ts';
import { hasRecordings, RECORDINGS, SKIP_REASON } from '../support/shared.ts';
import { readByGpxparser } from './ingest-gpxparser.ts';

/** Facts of the recordings' own index: points read, seconds from the first to the last. */
const READ: Record<string, readonly [points: number, durationS: number]> = {
  'rail/be_log_28554_L36-A_to_L36C-A.csv': [606, 242],
  'rail/be_log_28876_L36-B.csv': [1132, 452],
  'rail/be_log_29083_L36-A.csv': [878, 352],
  'rail/be_log_29304_L36-B_to_L36N-B.csv': [904, 361],
  'rail/be_log_29584_L36-A_to_L36C-A_to_L25N-B.csv': [1481, 592],
  'rail/be_log_30908_L36C-B_to_L36-A.csv': [1243, 496],
  'rail/be_log_31176_25N-B_to_L36C-B.csv': [714, 285],
  'rail/be_log_31241_L36-B_to_L36C-B_to_L25N-A.csv': [2310, 923],
  'rail/it_20250706-175442.gpx': [7797, 10_408],
  'rail/in_20241209-151406.gpx': [4652, 5586],
  'rail/in_20250222-071621.gpx': [4084, 4678],
  'rail/in_20250806-183746.gpx': [3554, 4441],
  'rail/in_20250808-183542.gpx': [3607, 5182],
  'road/us_nds_drive8.csv': [1382, 1381],
  'road/us_nds_drive15.csv': [1818, 1890],
  'road/us_nds_drive31.csv': [2473, 2519],
  'road/us_nds_drive9.csv': [562, 605],
  // 1,500 rows, of which 300 bring a new position.
  'road/de_balzer_2014-02-14.csv': [300, 30],
  // Month names, 26 Hz of sensors with positions held; the index could not read its times.
  'road/us_ikhyd_sample_trip.csv': [207, 184],
  'road/ca_dg100_highway.gpx': [12_027, 7_248_592],
  'road/nl_sbn-v13_delft.gpx': [3453, 3541],
  'road/us_virb_car.fit': [145, 144],
  'road/cz_adddate.nmea': [500, 499],
  'road/logger-speed-1hz.gpx': [1199, 1788],
  'road/logger-speed-1hz.csv': [1199, 1788],
  'road/receiver-2s-positions.gpx': [958, 60_416],
  'known-geometry/gb_luton_400m_track.gpx': [691, 1527],
  // 3,850 rows, of which 89 repeat time and place; the index counts the others.
  'known-geometry/cn_tianma_lap9.csv': [3850, 84],
  'ugly/babel_expertgps.gpx': [64, 7176],
  'ugly/babel_gpxpassthrough11.gpx': [3, 339],
  'ugly/babel_gpx_garmin_extensions.gpx': [8, 7],
  'ugly/babel_gpx_subsecond-sample.gpx': [5, 0.8],
  'ugly/babel_trackfilter_faketime.gpx': [3, NaN],
  'ugly/babel_segmented_tracks.gpx': [46, NaN],
  'ugly/babel_skytraq-artificial.gpx': [43, NaN],
  'ugly/babel_igc2.igc': [9, NaN],
  'ugly/babel_realtime.kml': [17, NaN],
  'ugly/babel_google_ext.kml': [451, 6130],
  // Two places, matched with their times by order: the first and last of four times have none.
  'ugly/babel_opentracks.kml': [2, NaN],
  'ugly/babel_nmeadatetime.nmea': [13, 17],
  'ugly/babel_nmeadate.nmea': [6, NaN],
  'ugly/babel_addmultipledaysfwd.nmea': [28, 97_200],
  'ugly/babel_garminconnect.csv': [68, 298],
  'ugly/babel_24173415.CSV': [742, 683],
  'ugly/babel_v900_basic_mode.csv': [14, 13],
  'ugly/babel_fit-sample.fit': [533, 2810],
  'ugly/babel_tcxdata.tcx': [4, 3],
  'ugly/babel_tcxdatagns.tcx': [4, 3],
  'ugly/babel_gtrnctr-readcp.tcx': [18, 309],
  'ugly/gpxpy_track-with-empty-segment.gpx': [9, 76],
  'ugly/gpxpy_track-with-less-sec-time.gpx': [2, 1],
  'ugly/gpxpy_track_with_speed.gpx': [3, 13],
  'ugly/tgj_bad.tcx': [2, 1],
  'ugly/tgj_osm.gpx': [420, NaN],
  'ugly/tgj_gxmultitrack.kml': [26, 67.9],
  'ugly/tgj_gxtrack.kml': [7, 47],
  'ugly/tgj_non_gx_multitrack.kml': [16, 16],
  'ugly/tgj_apple_watch_route.gpx': [44, 43],
  'ugly/tgj_run_gpxtpx.gpx': [42, 41],
  'ugly/tgj_sample.tcx': [17, 1431],
  'ugly/gpsd_firefly-II.log': [23, 22],
  'ugly/gpsd_gp-320fw-2019-04-06-overflow.log': [21, 20],
  'ugly/gpsd_haicom-305N.log': [68, 71],
  'ugly/gpsd_saab-r4.log': [12, 11],
  'ugly/gpsd_sl869.log': [8, 6],
  'ugly/npm_igc_marcourt.igc': [221, 220],
  'ugly/npm_stoplight_sample-ride.gpx': [850, 1338],
};

/** Files that are no usable log, and the code that says why. */
const REFUSED: Record<string, string> = {
  'known-geometry/be_network_airport.geojson': 'ingest/no-times',
  'known-geometry/us_indianapolis_oval.json': 'ingest/not-a-log',
  'ugly/us_ikhyd_trip_with_obd.txt': 'ingest/columns-unknown',
  'ugly/babel_empty.gpx': 'ingest/no-points',
  'ugly/babel_basecamp.gpx': 'ingest/no-times',
  'ugly/babel_lowrance-utf16-test.gpx': 'ingest/no-points',
  // Only waypoint sentences, in UTF-16.
  'ugly/babel_testsupplementalplane.nmea': 'ingest/no-points',
  'ugly/babel_unknowntag.gpx': 'ingest/no-points',
  // Only waypoints with times, no track.
  'ugly/babel_osm-data.gpx': 'ingest/no-points',
  'ugly/babel_skydrop.kml': 'ingest/no-times',
  'ugly/babel_unidelim.csv': 'ingest/columns-unknown',
  'ugly/babel_grid-swiss.csv': 'ingest/columns-unknown',
  'ugly/babel_humantodec1.csv': 'ingest/columns-unknown',
  'ugly/babel_grapheme.csv': 'ingest/columns-unknown',
  'ugly/babel_heightcheck.csv': 'ingest/columns-unknown',
  'ugly/babel_garmin-vivosmart-hr.fit': 'ingest/no-points',
  'ugly/babel_geojson.geojson': 'ingest/no-times',
  'ugly/gpxpy_unicode_with_bom.gpx': 'ingest/no-points',
  'ugly/gpxpy_gpx1.1_with_all_fields.gpx': 'ingest/single-point',
  'ugly/gpxpy_gpx1.0_with_all_fields.gpx': 'ingest/single-point',
  'ugly/gpxpy_gpx1.1_with_extensions_without_namespaces.gpx': 'ingest/no-points',
  'ugly/gpxpy_track_with_dilution_errors.gpx': 'ingest/no-times',
  'ugly/gpxpy_track-with-small-floats.gpx': 'ingest/no-times',
  'ugly/gpxpy_gpx-with-node-with-comments.gpx': 'ingest/single-point',
  'ugly/tgj_bad.gpx': 'ingest/no-points',
  'ugly/tgj_bad.kml': 'ingest/no-points',
  'ugly/tgj_empty_trk.gpx': 'ingest/no-points',
  'ugly/tgj_selfclosing.kml': 'ingest/no-points',
  // A planned route, no track.
  'ugly/tgj_opencpn.gpx': 'ingest/no-points',
  'ugly/tgj_unique_trkpt.gpx': 'ingest/single-point',
  'ugly/gpsd_tcp-torture.log': 'ingest/single-point',
  'ugly/gpsd_skytraq.log': 'ingest/no-points',
};

/** Logs of receivers whose counts in the index follow other rules (only RMC counted, or sentences without checksum). */
const COUNTED_OTHERWISE = new Set([
  'ugly/babel_nmea+ms.txt',
  'ugly/gpsd_bt451.log',
  'ugly/gpsd_april6_2019.log',
  'ugly/gpsd_gp-320fw-2019-04-07-coldboot.log',
  'ugly/gpsd_hp58534a.log',
]);

const folders = ['rail', 'road', 'known-geometry', 'ugly'];
const files = hasRecordings
  ? folders.flatMap((folder) => readdirSync(`${RECORDINGS}${folder}`).map((file) => `${folder}/${file}`))
  : [];

describe.skipIf(!hasRecordings)(`every real recording is read or refused (skipped when ${SKIP_REASON})`, () => {
  it('the lists here cover every file of the folder', () => {
    const known = new Set([...Object.keys(READ), ...Object.keys(REFUSED), ...COUNTED_OTHERWISE]);
    expect(files.filter((file) => !known.has(file))).toEqual([]);
    expect(files.length).toBe(known.size);
  });

  it.each(Object.entries(READ))(
    '%s has the points and the duration of the index',
    async (file, [points, durationS]) => {
      const { recordings, refused } = await ingestFile(`${RECORDINGS}${file}`, { name: file });
      expect(refused).toEqual([]);
      const { fixes } = recordings[0]!;
      expect(fixes.count).toBe(points);
      if (Number.isFinite(durationS)) {
        const times = [...fixes.utcS].filter(Number.isFinite);
        expect(Math.abs(Math.max(...times) - Math.min(...times) - durationS)).toBeLessThan(1);
      }
    },
  );

  it.each(Object.entries(REFUSED))('%s is refused as %s, with place, cause and remedy', async (file, code) => {
    const { recordings, refused } = await ingestFile(`${RECORDINGS}${file}`, { name: file });
    expect(recordings).toEqual([]);
    const { fault } = refused[0]!;
    expect(fault.code).toBe(code);
    expect(fault.place.file).toBe(file);
    expect(fault.cause.length).toBeGreaterThan(20);
    expect(fault.remedy.length).toBeGreaterThan(15);
  });

  it.each([...Object.keys(READ), ...COUNTED_OTHERWISE])(
    '%s: cleaning loses no fix without counting it',
    async (file) => {
      const { recordings } = await ingestFile(`${RECORDINGS}${file}`, { name: file });
      for (const recording of recordings) {
        const { runs, findings } = cleanRecording(recording);
        const kept = runs.reduce((total, { fixes }) => total + fixes.count, 0);
        expect(kept + findings.reduce((total, { dropped }) => total + dropped, 0)).toBe(recording.fixes.count);
        for (const { fixes } of runs) {
          for (let i = 1; i < fixes.count; i++) expect(fixes.timeS[i]! > fixes.timeS[i - 1]!).toBe(true);
        }
      }
    },
  );

  it('makes one run of each train and each drive of one trip', async () => {
    const single = Object.keys(READ).filter((file) =>
      /^rail\/(in|it)_|^road\/(us_nds|nl|cz|logger|us_virb)/.test(file),
    );
    for (const file of single) {
      const { recordings } = await ingestFile(`${RECORDINGS}${file}`, { name: file });
      const { runs } = cleanRecording(recordings[0]!);
      expect([file, runs.length]).toEqual([file, 1]);
      expect(runs[0]!.fixes.count / recordings[0]!.fixes.count, file).toBeGreaterThan(0.99);
    }
  });

  it('a log and its maker’s own CSV of it give the same fixes', async () => {
    const [gpx, csv] = await Promise.all(
      ['gpx', 'csv'].map((ending) => ingestFile(`${RECORDINGS}road/logger-speed-1hz.${ending}`, { name: ending })),
    );
    const [a, b] = [gpx!.recordings[0]!.fixes, csv!.recordings[0]!.fixes];
    expect([...a.utcS]).toEqual([...b.utcS]);
    for (let i = 0; i < a.count; i++) {
      expect(Math.abs(a.latDeg[i]! - b.latDeg[i]!)).toBeLessThan(2e-6);
      expect(Math.abs(a.speedMps![i]! - b.speedMps![i]!)).toBeLessThan(2e-3);
    }
  });
});

describe.skipIf(!hasRecordings)(`gpxparser as an independent reference (skipped when ${SKIP_REASON})`, () => {
  it('reads the same points in the same order with the same values on every GPX that it can read', async () => {
    // Source: the package gpxparser 3.0.8, unchanged, on a current DOM.
    const gpx = files.filter((file) => file.endsWith('.gpx') && readFileSync(`${RECORDINGS}${file}`).length < 520_000);
    const texts = gpx.map((file) => {
      const bytes = readFileSync(`${RECORDINGS}${file}`);
      const latin = /encoding="ISO-8859-1"/i.test(bytes.subarray(0, 200).toString('latin1'));
      return bytes.toString(latin ? 'latin1' : 'utf8').replace(/^\ufeff/, '');
    });
    const references = await readByGpxparser(texts);
    let compared = 0;
    for (const [k, file] of gpx.entries()) {
      const reference = references[k];
      if (reference === null || reference === undefined) continue;
      const source = memorySource(file, readFileSync(`${RECORDINGS}${file}`));
      const { fixes, waypoints, findings } = await readGpx(source, { columns: {}, maxFixes: 1e6 });
      const expected = reference.points.filter(({ lat, lon }) => Number.isFinite(lat) && Number.isFinite(lon));
      expect([file, fixes.count]).toEqual([file, expected.length]);
      // Times without a zone are local time to gpxparser, UTC to GPX.
      const zoned = findings.every(({ code }) => code !== 'ingest/no-zone');
      expected.forEach(({ lat, lon, ele, time }, i) => {
        expect(fixes.latDeg[i]).toBe(lat);
        expect(fixes.lonDeg[i]).toBe(lon);
        if (ele !== null) expect(fixes.elevationM![i]).toBe(Math.fround(ele));
        if (time !== null && zoned) {
          expect(Math.abs(fixes.utcS[i]! - Date.parse(time) / 1000)).toBeLessThan(0.001);
        }
      });
      expect([file, waypoints.length]).toEqual([file, reference.waypoints + reference.routePoints]);
      compared += expected.length;
    }
    // Nothing was compared by chance of an empty list.
    expect(compared).toBeGreaterThan(9000);
  });
});
