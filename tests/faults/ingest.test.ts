import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { ingestFile } from '../../server/ingest/index.ts';
import { describeFault } from '../../shared/model/fault.ts';
import { gpxText } from '../bench/ingest.ts';
import { ingest, recordingOf, refusalOf } from '../unit/ingest/support.ts';

describe('bad input gets an error with file, cause and remedy', () => {
  it.each([
    ['0 bytes', '', 'ingest/empty'],
    ['blanks', ' \n\r\n\t', 'ingest/empty'],
    ['NULs', '\0'.repeat(5000), 'ingest/empty'],
    ['prose', 'Dear Sir,\nplease find the log below.\nYours\n', 'ingest/not-a-log'],
    ['a web page', '<!doctype html><html><body>Sign in</body></html>', 'ingest/not-a-log'],
    ['a picture', Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex'), 'ingest/not-a-log'],
    ['noise', Uint8Array.from({ length: 5000 }, (_, i) => (i * 7919 + (i >> 3) * 104_729) % 256), 'ingest/not-a-log'],
    ['JSON of something else', '{"a":[1,2,3]}', 'ingest/not-a-log'],
    ['an empty track', '<gpx><trk><trkseg/></trk></gpx>', 'ingest/no-points'],
    ['a header alone', 'time,lat,lon\n', 'ingest/columns-unknown'],
  ])('%s', async (_, content, code) => {
    const fault = await refusalOf(content);
    expect(fault.code).toBe(code);
    expect(fault.place.file).toBe('log');
    expect(describeFault(fault)).toMatch(/^log[^\n]*\. [A-Z][^\n]+$/);
  });

  it('a file that is not there, and a folder', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'bendbook-nothing-'));
    for (const path of [join(folder, 'absent.gpx'), folder]) {
      const { refused } = await ingestFile(path, { name: 'x' });
      expect(refused[0]!.fault.code).toBe('ingest/unreadable');
    }
  });

  it('a recording cut off at any byte keeps the whole points before the cut', async () => {
    const text = gpxText(40);
    for (let cut = text.indexOf('<trkpt'); cut < text.length; cut += 97) {
      const whole = (text.slice(0, cut).match(/<\/trkpt>/g) ?? []).length;
      const { recordings } = await ingest(text.slice(0, cut));
      if (whole >= 2) {
        const { count } = recordings[0]!.fixes;
        // The last point counts when its time stands before the cut.
        expect(count === whole || count === whole + 1).toBe(true);
      } else expect(recordings.every(({ fixes }) => fixes.count <= 2)).toBe(true);
    }
  });

  it('GPX in Latin-1 bytes that claims UTF-8 is read as Latin-1, and stray bytes are counted', async () => {
    const text = gpxText(10).replace('Bench', 'Größe');
    expect((await recordingOf(Buffer.from(text, 'latin1'))).encoding).toBe('ISO-8859-1');
    const stray = Buffer.concat([Buffer.from(text.replace('Größe', 'Größe und Länge')), Buffer.from([0xff, 0x0a])]);
    const recording = await recordingOf(stray);
    expect(recording.findings.map(({ code }) => code)).toContain('ingest/bad-characters');
    expect(recording.fixes.count).toBe(10);
  });

  it('one line of 5 MB, one tag of 5 MB and a million open tags end in time', async () => {
    expect((await refusalOf(`time,lat,lon\n${'9'.repeat(5 << 20)}`)).code).toMatch(/^ingest\//);
    expect((await refusalOf(`<gpx a="${'x'.repeat(5 << 20)}"></gpx>`)).code).toBe('ingest/no-points');
    expect((await refusalOf(`<gpx>${'<a>'.repeat(1_000_000)}`)).code).toBe('ingest/no-points');
    expect((await refusalOf(`time,lat,lon\n${'"'.repeat(1 << 20)}\n`)).code).toMatch(/^ingest\//);
  });

  it('names and titles keep markup and formulas as plain text, cut to a sane length', async () => {
    const nasty = '<script>alert(1)</script>=1+1';
    const escaped = nasty.replaceAll('<', '&lt;').replaceAll('>', '&gt;');
    const { title } = await recordingOf(gpxText(10).replace('Bench', escaped + 'x'.repeat(10_000)));
    expect(title.startsWith(nasty)).toBe(true);
    expect(title.length).toBeLessThanOrEqual(500);
  });
});
