import { parseNmeaSentence } from 'nmea-simple';
import { describe, expect, it } from 'vitest';
import { codes, recordingOf, refusalOf, sentence } from './support.ts';

describe('NMEA 0183', () => {
  it('reads the sentences of the published example', async () => {
    // Source: the widely published RMC example of NMEA 0183 (for instance gpsd, "NMEA Revealed", RMC): 48°07.038' N,
    // 11°31.000' E, 22.4 kn, 84.4° true, 23 March 1994 12:35:19, checksum 6A.
    const text = '$GPRMC,123519,A,4807.038,N,01131.000,E,022.4,084.4,230394,003.1,W*6A\r\n';
    const { fixes } = await recordingOf(
      text + sentence('GPRMC,123520,A,4807.040,N,01131.010,E,022.4,084.4,230394,003.1,W'),
    );
    expect(fixes.latDeg[0]).toBeCloseTo(48.1173, 10);
    expect(fixes.lonDeg[0]).toBeCloseTo(11 + 31 / 60, 10);
    expect(fixes.utcS[0]).toBe(Date.parse('1994-03-23T12:35:19Z') / 1000);
    expect(fixes.speedMps![0]).toBeCloseTo((22.4 * 1852) / 3600, 5);
    expect(fixes.courseRad![0]).toBeCloseTo((84.4 * Math.PI) / 180, 6);
  });

  it('agrees with an independent parser on positions, speeds, courses and times', async () => {
    // Source: the package nmea-simple.
    const bodies = Array.from({ length: 200 }, (_, i) => {
      const minutes = (i * 0.2713) % 60;
      return `GNRMC,${String(100000 + i)}.${String(i % 10)}0,A,33${minutes.toFixed(4).padStart(7, '0')},S,1512${(i % 10).toString()}.5000,E,${(i / 7).toFixed(3)},${((i * 7.3) % 360).toFixed(2)},010223,,,A`;
    }).filter((body) => Number(body.slice(10, 12)) < 60);
    const { fixes } = await recordingOf(bodies.map(sentence).join(''));
    expect(fixes.count).toBe(bodies.length);
    bodies.forEach((body, i) => {
      const packet = parseNmeaSentence(sentence(body).trim());
      if (packet.sentenceId !== 'RMC') throw new Error('not RMC');
      expect(fixes.latDeg[i]).toBeCloseTo(packet.latitude, 9);
      expect(fixes.lonDeg[i]).toBeCloseTo(packet.longitude, 9);
      expect(fixes.speedMps![i]).toBeCloseTo((packet.speedKnots * 1852) / 3600, 4);
      expect(fixes.courseRad![i]! * (180 / Math.PI)).toBeCloseTo(packet.trackTrue, 3);
      expect(fixes.utcS[i]).toBeCloseTo(packet.datetime.getTime() / 1000, 2);
    });
  });

  it('joins the sentences of one time into one fix', async () => {
    const { fixes } = await recordingOf(
      [1, 2]
        .flatMap((s) => [
          sentence(`GPGGA,12000${s},4700.00${s},N,00800.000,E,4,12,0.7,431.5,M,47.0,M,,`),
          sentence(`GPRMC,12000${s},A,4700.00${s},N,00800.000,E,,,010124,,,R`),
          sentence('GPVTG,90.5,T,,M,,N,36.0,K,A'),
          sentence(`GPGST,12000${s},0.9,,,,3.0,4.0,5.0`),
        ])
        .join(''),
    );
    expect(fixes.count).toBe(2);
    expect(fixes.speedMps![0]).toBeCloseTo(10, 5);
    expect(fixes.courseRad![0]).toBeCloseTo((90.5 * Math.PI) / 180, 6);
    expect(fixes.fixQuality![0]).toBe(4);
    expect(fixes.satellites![0]).toBe(12);
    expect(fixes.accuracyM![0]).toBeCloseTo(5, 6);
    expect(fixes.elevationM![0]).toBeCloseTo(431.5, 3);
  });

  it('dates what comes before the first date backwards, over midnight', async () => {
    const gga = (time: string) => sentence(`GPGGA,${time},4700.000,N,00800.000,E,1,08,1.0,400,M,47,M,,`);
    const { fixes, findings } = await recordingOf(
      gga('235958') +
        gga('235959') +
        gga('000000') +
        sentence('GPRMC,000001,A,4700.000,N,00800.000,E,0,0,010125,,,A') +
        gga('000002'),
    );
    expect([...fixes.utcS].map((s) => new Date(1000 * s).toISOString().slice(0, 19))).toEqual([
      '2024-12-31T23:59:58',
      '2024-12-31T23:59:59',
      '2025-01-01T00:00:00',
      '2025-01-01T00:00:01',
      '2025-01-01T00:00:02',
    ]);
    expect(findings).toEqual([]);
  });

  it('counts wrong checksums, cut sentences, void fixes and impossible positions', async () => {
    const good = (s: number) =>
      sentence(`GPRMC,1200${String(s).padStart(2, '0')},A,4700.000,N,00800.000,E,1,2,010124,,,A`);
    const recording = await recordingOf(
      good(1) +
        good(2).replace('4700', '4701') +
        `${good(3).slice(0, 30)}\r\n` +
        sentence('GPRMC,120004,V,4700.000,N,00800.000,E,1,2,010124,,,N') +
        sentence('GPRMC,120005,A,4799.000,N,00800.000,E,1,2,010124,,,A') +
        good(6),
    );
    expect(recording.fixes.count).toBe(2);
    const counts = Object.fromEntries(recording.findings.map(({ code, count, dropped }) => [code, [count, dropped]]));
    expect(counts).toEqual({
      'ingest/checksum': [1, 0],
      'ingest/cut-sentence': [1, 0],
      'ingest/no-fix': [1, 0],
      'ingest/bad-position': [1, 1],
    });
    expect(recording.findings.find(({ code }) => code === 'ingest/checksum')!.places[0]).toMatchObject({ line: 2 });
  });

  it('reads logs whose lines end with CR alone, or that mix other text between sentences', async () => {
    const lines = [1, 2, 3].map((s) => sentence(`GPRMC,12000${s},A,4700.000,N,00800.000,E,1,2,010124,,,A`).trim());
    expect((await recordingOf(lines.join('\r'))).fixes.count).toBe(3);
    const mixed = await recordingOf(`boot ok\n12:00 ${lines[0]!} tail\n!AIVDM,1,1,,A,x,0*00\n${lines[1]!}\n`);
    expect(mixed.fixes.count).toBe(2);
    expect([...mixed.fixes.row]).toEqual([2, 4]);
  });

  it('reads a log in UTF-16 as the same log in ASCII', async () => {
    const text = [1, 2].map((s) => sentence(`GPRMC,12000${s},A,4700.00${s},N,00800.000,E,1,2,010124,,,A`)).join('');
    const wide = await recordingOf(Buffer.from(`\ufeff${text}`, 'utf16le'));
    expect(wide.encoding).toBe('UTF-16LE');
    expect([...wide.fixes.latDeg]).toEqual([...(await recordingOf(text)).fixes.latDeg]);
  });

  it('says so when no sentence has a date, and refuses a log without any fix', async () => {
    const gga = (time: string, quality: number) =>
      sentence(`GPGGA,${time},${quality === 0 ? ',,,' : '4700.000,N,00800.000,E'},${quality},08,1.0,400,M,47,M,,`);
    const undated = await recordingOf(gga('235959', 1) + gga('000001', 1));
    expect(codes(undated)).toEqual(['ingest/no-date']);
    expect(undated.fixes.utcS[1]! - undated.fixes.utcS[0]!).toBe(2);
    expect((await refusalOf(gga('235959', 0))).code).toBe('ingest/no-points');
  });
});
