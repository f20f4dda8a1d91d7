import type { Run } from '../../shared/model/run.ts';

/** What is written beside the fixes. */
export interface LogDetails {
  readonly title: string;
  readonly creator: string;
  /** Height above the ellipsoid's sea level at fix i, m. */
  readonly elevationM: (fix: number) => number;
  /** While slow, repeat the last course as telephones do, or leave it out. */
  readonly repeatCourse: boolean;
  readonly hdop: (fix: number) => number;
  readonly satellites: (fix: number) => number;
}

export interface Mark {
  readonly name: string;
  readonly latDeg: number;
  readonly lonDeg: number;
}

const DEGREES = 180 / Math.PI;

const isoTime = (utcS: number) => new Date(Math.round(utcS * 1000)).toISOString().replace('.000Z', 'Z');

/** Course in degrees at fix i; null where the log has none. */
function courseColumn(run: Run, repeat: boolean): (number | null)[] {
  let last: number | null = null;
  return Array.from({ length: run.fixes.count }, (_, i) => {
    const course = run.fixes.courseRad?.[i] ?? Number.NaN;
    if (!Number.isNaN(course)) {
      last = (course * DEGREES) % 360;
      return last;
    }
    return repeat ? last : null;
  });
}

/** GPX: version 1.0 has speed and course in the point, 1.1 in its extensions. */
export function writeGpx(run: Run, version: '1.0' | '1.1', details: LogDetails, marks: readonly Mark[]): string {
  const { fixes } = run;
  const courses = courseColumn(run, details.repeatCourse);
  const lines = [
    '<?xml version="1.0" encoding="UTF-8"?>',
    `<gpx version="${version}" creator="${details.creator}" xmlns="http://www.topografix.com/GPX/${version.replace('.', '/')}">`,
  ];
  for (const mark of marks) {
    lines.push(`<wpt lat="${mark.latDeg.toFixed(6)}" lon="${mark.lonDeg.toFixed(6)}"><name>${mark.name}</name></wpt>`);
  }
  lines.push('<trk>', `<name>${details.title}</name>`, '<trkseg>');
  for (let i = 0; i < fixes.count; i += 1) {
    const course = courses[i] === null ? '' : `<course>${courses[i]!.toFixed(1)}</course>`;
    const speed = fixes.speedMps ? `<speed>${fixes.speedMps[i]!.toFixed(2)}</speed>` : '';
    const old = version === '1.0' ? course + speed : '';
    const extended = version === '1.1' && (course || speed) ? `<extensions>${speed}${course}</extensions>` : '';
    lines.push(
      `<trkpt lat="${fixes.latDeg[i]!.toFixed(6)}" lon="${fixes.lonDeg[i]!.toFixed(6)}">` +
        `<ele>${details.elevationM(i).toFixed(1)}</ele><time>${isoTime(run.startUtcS + fixes.timeS[i]!)}</time>${old}` +
        `<sat>${String(details.satellites(i))}</sat><hdop>${details.hdop(i).toFixed(1)}</hdop>${extended}</trkpt>`,
    );
  }
  lines.push('</trkseg>', '</trk>', '</gpx>', '');
  return lines.join('\n');
}

/** Delimited text with units in the header: speed in km/h, course in degrees. */
export function writeCsv(run: Run, details: LogDetails): string {
  const { fixes } = run;
  const courses = courseColumn(run, details.repeatCourse);
  const lines = ['time,latitude,longitude,altitude_m,speed_kmh,course_deg,satellites,hdop'];
  for (let i = 0; i < fixes.count; i += 1) {
    lines.push(
      [
        isoTime(run.startUtcS + fixes.timeS[i]!),
        fixes.latDeg[i]!.toFixed(6),
        fixes.lonDeg[i]!.toFixed(6),
        details.elevationM(i).toFixed(1),
        ((fixes.speedMps?.[i] ?? 0) * 3.6).toFixed(2),
        courses[i]?.toFixed(1) ?? '',
        String(details.satellites(i)),
        details.hdop(i).toFixed(1),
      ].join(','),
    );
  }
  lines.push('');
  return lines.join('\n');
}

/** NMEA 0183 sentence with its checksum: exclusive or of the characters between $ and *. */
function sentence(body: string): string {
  let sum = 0;
  for (const letter of body) sum ^= letter.charCodeAt(0);
  return `$${body}*${sum.toString(16).toUpperCase().padStart(2, '0')}`;
}

function nmeaAngle(degrees: number, width: number, positive: string, negative: string): string {
  const size = Math.abs(degrees);
  // Rounded as a whole, so that minutes never read 60.
  const units = Math.round(size * 60 * 1e5);
  const whole = Math.floor(units / (60 * 1e5));
  const minutes = ((units - whole * 60 * 1e5) / 1e5).toFixed(5).padStart(8, '0');
  return `${String(whole).padStart(width, '0')}${minutes},${degrees < 0 ? negative : positive}`;
}

/** RMC, GGA and VTG every epoch; through a tunnel the receiver goes on with void sentences. */
export function writeNmea(run: Run, details: LogDetails): string {
  const { fixes } = run;
  const courses = courseColumn(run, details.repeatCourse);
  const lines: string[] = [];
  const intervalS = run.intervalS;
  let expected = fixes.timeS[0]!;
  for (let i = 0; i < fixes.count; i += 1) {
    const t = fixes.timeS[i]!;
    for (; expected < t - intervalS / 2; expected += intervalS) {
      const [time, date] = nmeaTime(run.startUtcS + expected);
      lines.push(sentence(`GNRMC,${time},V,,,,,,,${date},,,N`), sentence(`GNGGA,${time},,,,,0,00,99.99,,M,,M,,`));
    }
    expected = t + intervalS;
    const [time, date] = nmeaTime(run.startUtcS + t);
    const lat = nmeaAngle(fixes.latDeg[i]!, 2, 'N', 'S');
    const lon = nmeaAngle(fixes.lonDeg[i]!, 3, 'E', 'W');
    const speed = fixes.speedMps?.[i] ?? 0;
    const knots = (speed * (3600 / 1852)).toFixed(3);
    const course = courses[i]?.toFixed(2) ?? '';
    lines.push(
      sentence(`GNRMC,${time},A,${lat},${lon},${knots},${course},${date},,,A`),
      sentence(
        `GNGGA,${time},${lat},${lon},1,${String(details.satellites(i)).padStart(2, '0')},${details.hdop(i).toFixed(2)},${details.elevationM(i).toFixed(1)},M,0.0,M,,`,
      ),
      sentence(`GNVTG,${course},T,,M,${knots},N,${(speed * 3.6).toFixed(3)},K,A`),
    );
  }
  lines.push('');
  return lines.join('\r\n');
}

function nmeaTime(utcS: number): readonly [time: string, date: string] {
  const iso = new Date(Math.round(utcS * 100) * 10).toISOString();
  return [
    `${iso.slice(11, 13)}${iso.slice(14, 16)}${iso.slice(17, 22)}`,
    `${iso.slice(8, 10)}${iso.slice(5, 7)}${iso.slice(2, 4)}`,
  ];
}
