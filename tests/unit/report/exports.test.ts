import { parse } from 'csv-parse/sync';
import { describe, expect, it } from 'vitest';
import { CURVE_COLUMNS } from '../../../shared/schema/curve-row.ts';
import { thinForDrawing } from '../../../server/report/band-drawing.ts';
import {
  curveTableCsv,
  curveTableGeoJson,
  curveTableJson,
  curveTableXlsx,
  profileCsv,
  reportHtml,
  reportPdf,
} from '../../../server/report/index.ts';
import { fixtureContext, fixtureCurve, fixtureProfile } from '../../support/report-fixture.ts';
import { readZip } from '../../support/zip.ts';

/** The columns that the contract of the curve table names, in its order (design of the table). */
const CONTRACT =
  'run,curve,hand,shape,start_m,end_m,lat_start,lon_start,lat_mid,lon_mid,lat_end,lon_end,radius_m,radius_low_m,' +
  'radius_high_m,deflection_deg,arc_m,entry_transition_m,exit_transition_m,speed_kmh,speed_max_kmh,speed_low_kmh,' +
  'speed_high_kmh,cant_mm,superelevation_pct,cant_source,equilibrium_cant_mm,cant_deficiency_mm,' +
  'cant_deficiency_low_mm,cant_deficiency_high_mm,cant_excess_mm,deficiency_rate_mm_s,cant_rate_mm_s,' +
  'lateral_track_ms2,lateral_track_low_ms2,lateral_track_high_ms2,lateral_body_ms2,jerk_ms3,side_friction,' +
  'ball_bank_deg,pct_seated,pct_standing,verdict,governing_criterion,value,limit,utilisation,complying_speed_kmh,' +
  'complying_cant_mm,time_cost_s,notes';

/** Rows of a CSV by its header, through a parser that is not ours. */
function rowsOf(csv: string): Record<string, string>[] {
  return parse<Record<string, string>>(csv, { columns: true });
}

describe('exports of the curve table', () => {
  it('the columns are those of the contract, in its order', () => {
    expect(CURVE_COLUMNS.join(',')).toBe(CONTRACT);
  });

  it('CSV read back by an independent parser gives the rounded rows, unknown values empty', () => {
    const context = fixtureContext([fixtureCurve(), fixtureCurve({ curve: 2, cant_mm: null, verdict: 'within' })]);
    const rows = rowsOf(curveTableCsv(context));
    expect(rows).toHaveLength(2);
    expect(Object.keys(rows[0]!).join(',')).toBe(`${CONTRACT},caution`);
    expect(rows[0]).toMatchObject({ radius_m: '412.3', lateral_track_ms2: '1.111', verdict: 'over', cant_mm: '80' });
    expect(rows[1]).toMatchObject({ curve: '2', cant_mm: '', superelevation_pct: '' });
    expect(rows[0]!.caution).toContain('not a track-geometry measurement');
  });

  it('text that a spreadsheet would run as a formula is disarmed in CSV and XLSX', async () => {
    const context = fixtureContext([fixtureCurve({ run: '=HYPERLINK("x")', notes: '@SUM(A1)\u0000' })]);
    const [row] = rowsOf(curveTableCsv(context));
    expect(row!.run).toBe(`'=HYPERLINK("x")`);
    expect(row!.notes).toBe(`'@SUM(A1)`);
    const files = await readZip(await curveTableXlsx(context));
    const all = [...files.values()].join('');
    expect(all).not.toContain('<f>');
    expect(all).not.toContain('>=HYPERLINK');
  });

  it('JSON, GeoJSON and CSV carry the same numbers under the same names', () => {
    const context = fixtureContext([fixtureCurve()]);
    const [csv] = rowsOf(curveTableCsv(context));
    const json = curveTableJson(context).curves[0]! as unknown as Record<string, unknown>;
    const geo = curveTableGeoJson(context).features[0]!.properties as unknown as Record<string, unknown>;
    for (const key of CURVE_COLUMNS) {
      expect(geo[key], key).toEqual(json[key]);
      expect(json[key] === null ? '' : `${json[key] as string | number}`, key).toBe(csv![key]);
    }
  });

  it('GeoJSON cuts a curve at the antimeridian (RFC 7946, 3.1.9)', () => {
    const context = fixtureContext([
      fixtureCurve({ lon_start: 179.9, lat_start: 0, lon_mid: -179.9, lat_mid: 1, lon_end: -179.7, lat_end: 2 }),
    ]);
    const { geometry } = curveTableGeoJson(context).features[0]!;
    expect(geometry).toEqual({
      type: 'MultiLineString',
      coordinates: [
        [
          [179.9, 0],
          [180, 0.5],
        ],
        [
          [-180, 0.5],
          [-179.9, 1],
          [-179.7, 2],
        ],
      ],
    });
  });

  it('XLSX has typed numbers, units in its headers and a sheet of method and cautions', async () => {
    const files = await readZip(await curveTableXlsx(fixtureContext([fixtureCurve()])));
    const names = [...files.keys()].filter((name) => /worksheets\/sheet\d/.test(name));
    expect(names).toHaveLength(3);
    const all = [...files.values()].join('');
    expect(all).toContain('radius_m [m]');
    expect(all).toContain('Method and cautions');
    expect(all).toContain('The limits of the operator govern.');
    expect(files.get('xl/worksheets/sheet1.xml')).toMatch(/<v>412\.3<\/v>/);
  });
});

describe('profile as CSV', () => {
  it('begins with the columns of the contract and has one row a place', () => {
    const lines = [...profileCsv(fixtureProfile(), 'take "care"')].join('').trimEnd().split('\r\n');
    expect(lines[0]).toMatch(
      /^s_m,t_s,lat,lon,speed_ms,speed_sd_ms,course_deg,curvature_1_m,curvature_sd_1_m,cant_mm,lateral_track_ms2,lateral_track_sd_ms2,lateral_body_ms2,jerk_ms3,utilisation,/,
    );
    expect(lines).toHaveLength(602);
    expect(lines[1]).toMatch(/"take ""care"""$/);
  });
});

describe('report', () => {
  it('HTML shows text of files as text, needs no network and no script', () => {
    const context = fixtureContext([fixtureCurve({ notes: '<script>alert(1)</script>' })]);
    const html = reportHtml({ ...context, title: '<img src=x onerror=1>' }, () => fixtureProfile());
    expect(html).not.toMatch(/<script|<img|https?:\/\/(?!www\.w3\.org\/2000\/svg)/);
    expect(html).toContain('&lt;script&gt;alert(1)&lt;/script&gt;');
    expect(html).toContain('ab'.repeat(32));
    expect(html).toContain('1500 × 25.96²');
  });

  it('PDF is made, one page a hotspot besides summary, table and method', async () => {
    const pdf = await reportPdf(
      fixtureContext([
        fixtureCurve(),
        fixtureCurve({ curve: 2, verdict: 'undecided' }),
        fixtureCurve({ curve: 3, verdict: 'within' }),
      ]),
      () => fixtureProfile(),
    );
    expect(pdf.subarray(0, 5).toString()).toBe('%PDF-');
    const pages = pdf.toString('latin1').match(/\/Type \/Page\b/g);
    expect(pages!.length).toBe(5);
  });

  it('thinning for a drawing keeps the worst place', () => {
    const profile = fixtureProfile(6001);
    const utilisation = Array.from(profile.utilisation!);
    utilisation[3333] = 2.5;
    const thin = thinForDrawing({ ...profile, utilisation }, 100);
    expect(Math.max(...Array.from(thin.utilisation!))).toBe(2.5);
    expect(thin.s_m!.length).toBeLessThanOrEqual(101);
  });
});
