import { describe, expect, it } from 'vitest';
import { codes, recordingOf, refusalOf } from './support.ts';

const point = (s: number, inner = '', lat = 47 + s / 1000) =>
  `<trkpt lat="${String(lat)}" lon="8.5"><time>2024-01-01T12:00:${String(s).padStart(2, '0')}Z</time>${inner}</trkpt>`;
const gpx = (body: string) => `<?xml version="1.0"?><gpx version="1.1" creator="t">${body}</gpx>`;
const track = (...points: string[]) => gpx(`<trk><name>A &amp; B</name><trkseg>${points.join('\n')}</trkseg></trk>`);

describe('GPX', () => {
  it('reads speed, course and accuracy from the point or from extensions under any prefix', async () => {
    // Source: GPX 1.0 schema (speed m/s and course degrees in the point); TrackPointExtension v2 schema (m/s, degrees).
    const { fixes, title } = await recordingOf(
      track(
        point(1, '<ele>400.5</ele><course>90</course><speed>12.5</speed><fix>dgps</fix><sat>7</sat><hdop>1.2</hdop>'),
        point(
          2,
          '<extensions><q:TrackPointExtension><q:speed>13.5</q:speed><q:course>180</q:course></q:TrackPointExtension></extensions>',
        ),
        point(3, '<extensions><speed>14.5</speed><course>270</course><hAcc>3.5</hAcc></extensions>'),
      ),
    );
    expect([...fixes.speedMps!]).toEqual([12.5, 13.5, 14.5]);
    expect([...fixes.courseRad!].map((rad) => Math.round((rad * 180) / Math.PI))).toEqual([90, 180, 270]);
    expect(fixes.accuracyM![2]).toBe(3.5);
    expect(fixes.elevationM![0]).toBe(400.5);
    expect([fixes.satellites![0], fixes.fixQuality![0]]).toEqual([7, 2]);
    expect([fixes.satellites![1], fixes.fixQuality![1]]).toEqual([255, 255]);
    expect(title).toBe('A & B');
  });

  it('numbers the segments of all tracks and keeps the order of the file', async () => {
    const { fixes } = await recordingOf(
      gpx(
        `<trk><trkseg>${point(1)}${point(2)}</trkseg><trkseg/><trkseg>${point(3)}</trkseg></trk><trk><trkseg>${point(0)}</trkseg></trk>`,
      ),
    );
    expect([...fixes.segment]).toEqual([0, 0, 2, 3]);
    expect(fixes.utcS[3]).toBeLessThan(fixes.utcS[0]!);
  });

  it('leaves waypoints, routes and the title of the metadata to gpxparser', async () => {
    const { waypoints, title } = await recordingOf(
      gpx(
        `<metadata><name>Line 7 &lt;north&gt;</name></metadata><wpt lat="47.1" lon="8.1"><name>Halt &amp; yard</name></wpt>` +
          `<rte><name>Plan</name><rtept lat="47.2" lon="8.2"/><rtept lat="47.3" lon="8.3"/></rte>` +
          `<trk><trkseg>${point(1)}${point(2)}</trkseg></trk>`,
      ),
    );
    expect(title).toBe('Line 7 <north>');
    expect(waypoints).toEqual([
      { name: 'Halt & yard', latDeg: 47.1, lonDeg: 8.1 },
      { name: 'Plan 1', latDeg: 47.2, lonDeg: 8.2 },
      { name: 'Plan 2', latDeg: 47.3, lonDeg: 8.3 },
    ]);
    // The DOM that gpxparser needs stays in its own thread.
    expect('window' in globalThis).toBe(false);
  });

  it('keeps all whole points of a recording that was cut off', async () => {
    const text = track(point(1), point(2), point(3));
    const cut = await recordingOf(text.slice(0, text.indexOf('12:00:03') + 4));
    expect(cut.fixes.count).toBe(2);
    const finding = cut.findings.find(({ code }) => code === 'ingest/cut-off')!;
    expect([finding.count, finding.dropped]).toEqual([1, 1]);
  });

  it('loses one point, counted and placed, to one damaged byte', async () => {
    const text = track(...Array.from({ length: 50 }, (_, s) => point(s)));
    const hurt = text.replace('12:00:20Z</time>', '12:00:20Z<&time>');
    const recording = await recordingOf(hurt);
    expect(recording.fixes.count).toBe(49);
    const finding = recording.findings.find(({ code }) => code === 'ingest/damaged')!;
    expect([finding.count, finding.dropped]).toEqual([1, 1]);
    expect(finding.places[0]!.line).toBe(21);
    expect(recording.fixes.row[20]).toBe(22);
  });

  it('drops no channel of a lost point onto the next', async () => {
    const recording = await recordingOf(track(point(1), point(2, '<speed>99</speed><x <y'), point(3), point(4)));
    expect(recording.fixes.speedMps?.[1] ?? NaN).toBeNaN();
  });

  it('reads on after a stray ampersand, which a parser may take for the start of an entity without end', async () => {
    const recording = await recordingOf(track(point(1), point(2, '<cmt>this & that</cmt>'), point(3), point(4)));
    expect(recording.fixes.count).toBe(4);
  });

  it('never expands entities of the document, and gives up nesting without end', async () => {
    const bomb = `<?xml version="1.0"?><!DOCTYPE gpx [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;&a;&a;">]>`;
    const recording = await recordingOf(
      `${bomb}<gpx><trk><name>&b;</name><trkseg>${point(1)}${point(2)}</trkseg></trk></gpx>`,
    );
    expect(recording.title).not.toContain('aaaa');
    expect(recording.fixes.count).toBe(2);
    const deep = `<gpx>${'<a>'.repeat(200_000)}`;
    expect((await refusalOf(deep)).code).toBe('ingest/no-points');
  });

  it('tells points without a valid place, with the line of the first', async () => {
    const recording = await recordingOf(
      track(point(1), point(2, '', 91), point(3), '<trkpt lat="undefined" lon="8"/>'),
    );
    const finding = recording.findings.find(({ code }) => code === 'ingest/bad-position')!;
    expect([finding.dropped, recording.fixes.count, finding.places[0]!.line]).toEqual([2, 2, 2]);
  });

  it.each([
    ['UTF-16LE', Buffer.from(`\ufeff${track(point(1), point(2)).replace('A &amp; B', 'Žďár')}`, 'utf16le')],
    ['UTF-16BE', Buffer.from(`\ufeff${track(point(1), point(2)).replace('A &amp; B', 'Žďár')}`, 'utf16le').swap16()],
    ['UTF-8', Buffer.from(`\ufeff${track(point(1), point(2)).replace('A &amp; B', 'Žďár')}`)],
  ])('reads %s', async (encoding, content) => {
    const recording = await recordingOf(content);
    expect([recording.encoding, recording.title, recording.fixes.count]).toEqual([encoding, 'Žďár', 2]);
  });

  it('reads Latin-1, declared or not', async () => {
    for (const declaration of ['<?xml version="1.0" encoding="ISO-8859-1"?>', '<?xml version="1.0"?>']) {
      const text = track(point(1), point(2))
        .replace('<?xml version="1.0"?>', declaration)
        .replace('A &amp; B', 'Zürich');
      const recording = await recordingOf(Buffer.from(text, 'latin1'));
      expect([recording.encoding, recording.title]).toEqual(['ISO-8859-1', 'Zürich']);
    }
  });

  it('refuses files without points, without times and with a single point, each with its own code', async () => {
    expect((await refusalOf(gpx('<wpt lat="1" lon="2"/>'))).code).toBe('ingest/no-points');
    expect((await refusalOf(track('<trkpt lat="1" lon="2"/>', '<trkpt lat="1.1" lon="2"/>'))).code).toBe(
      'ingest/no-times',
    );
    expect((await refusalOf(track(point(1)))).code).toBe('ingest/single-point');
    expect((await refusalOf(track(point(1), point(2)), { maxFixes: 1 })).code).toBe('ingest/too-many-points');
  });

  it('stops when it is cancelled', async () => {
    const signal = AbortSignal.abort(new Error('stop'));
    await expect(recordingOf(track(point(1), point(2)), { signal })).rejects.toThrow('stop');
  });

  it('says when stray characters are in a time and keeps the point', async () => {
    const recording = await recordingOf(track(point(1), point(2).replace('12:00', '12x00'), point(3)));
    expect(recording.fixes.count).toBe(3);
    expect(recording.fixes.utcS[1]).toBeNaN();
    expect(codes(recording)).toEqual(['ingest/bad-time']);
  });
});
