import { BendbookError } from '../../../shared/model/fault.ts';
import { UNITS, type Unit } from '../../../shared/units.ts';

/** What a column of a delimited file can feed. */
const COLUMN_FIELDS = [
  'utcS',
  'date',
  'timeOfDay',
  'latDeg',
  'latHemisphere',
  'lonDeg',
  'lonHemisphere',
  'elevationM',
  'speedMps',
  'courseRad',
  'accuracyM',
  'hdop',
  'satellites',
  'fixQuality',
  'speedAccuracyMps',
  'courseAccuracyRad',
  'segment',
  'accelX',
  'accelY',
  'accelZ',
  'gyroX',
  'gyroY',
  'gyroZ',
] as const;
export type ColumnField = (typeof COLUMN_FIELDS)[number];

/** Everyday names accepted for fields when columns are named by hand. */
const ALIASES: Record<string, ColumnField> = {
  time: 'utcS',
  timestamp: 'utcS',
  lat: 'latDeg',
  latitude: 'latDeg',
  lon: 'lonDeg',
  longitude: 'lonDeg',
  elevation: 'elevationM',
  altitude: 'elevationM',
  speed: 'speedMps',
  course: 'courseRad',
  heading: 'courseRad',
  accuracy: 'accuracyM',
  quality: 'fixQuality',
  vehicle: 'segment',
};

/** Field named by hand. Throws `ingest/unknown-field` when there is none of this name. */
export function fieldNamed(name: string): ColumnField {
  const field = COLUMN_FIELDS.find((known) => known === name) ?? ALIASES[name];
  if (field !== undefined) return field;
  throw new BendbookError('ingest/unknown-field', {
    cause: `"${name}" is not a quantity that a column can be named for`,
    remedy: `Use one of: ${[...Object.keys(ALIASES), ...COLUMN_FIELDS].join(', ')}`,
  });
}

/** Units as written in headers and cells, lower case, to the units of shared/units.ts and to scales of time. */
const UNIT_WORDS: Record<string, Unit | 'ms' | 'us' | 'ns' | 'DOP' | 'cm'> = {
  'km/h': 'km/h',
  kmh: 'km/h',
  kph: 'km/h',
  kmph: 'km/h',
  'km/hr': 'km/h',
  'km/std': 'km/h',
  mph: 'mph',
  'mi/h': 'mph',
  kn: 'kn',
  kt: 'kn',
  kts: 'kn',
  knot: 'kn',
  knots: 'kn',
  'm/s': 'm/s',
  mps: 'm/s',
  'm/sec': 'm/s',
  'ft/s²': 'ft/s²',
  m: 'm',
  meter: 'm',
  meters: 'm',
  metre: 'm',
  metres: 'm',
  km: 'km',
  cm: 'cm',
  ft: 'ft',
  feet: 'ft',
  deg: '°',
  degs: '°',
  degree: '°',
  degrees: '°',
  '°': '°',
  rad: 'rad',
  rads: 'rad',
  radians: 'rad',
  g: 'g',
  "g's": 'g',
  gs: 'g',
  'm/s2': 'm/s²',
  'm/s²': 'm/s²',
  'm/s^2': 'm/s²',
  mps2: 'm/s²',
  ms2: 'm/s²',
  'm/s/s': 'm/s²',
  'deg/s': '°/s',
  'deg/sec': '°/s',
  'degrees/s': '°/s',
  '°/s': '°/s',
  dps: '°/s',
  'rad/s': 'rad/s',
  'rad/sec': 'rad/s',
  'rads/s': 'rad/s',
  s: 's',
  sec: 's',
  secs: 's',
  seconds: 's',
  ms: 'ms',
  msec: 'ms',
  millis: 'ms',
  milliseconds: 'ms',
  us: 'us',
  µs: 'us',
  ns: 'ns',
  'unix time': 's',
  dop: 'DOP',
};

/** Quantity of each field that has units. */
const QUANTITY: Partial<Record<ColumnField, string>> = {
  elevationM: 'length',
  accuracyM: 'length',
  speedMps: 'speed',
  speedAccuracyMps: 'speed',
  courseRad: 'angle',
  courseAccuracyRad: 'angle',
  accelX: 'acceleration',
  accelY: 'acceleration',
  accelZ: 'acceleration',
  gyroX: 'angular speed',
  gyroY: 'angular speed',
  gyroZ: 'angular speed',
};

/** Units assumed where none is stated. Accelerations and turn rates are judged by their size instead. */
export const DEFAULT_UNIT: Partial<Record<ColumnField, Unit>> = {
  elevationM: 'm',
  accuracyM: 'm',
  speedMps: 'm/s',
  speedAccuracyMps: 'm/s',
  courseRad: '°',
  courseAccuracyRad: '°',
};

/** Unit that a word stands for, when a column of `field` can have it; else ''. */
export function unitFor(field: ColumnField, word: string): string {
  const key = word.trim().toLowerCase();
  const unit = UNIT_WORDS[key] ?? (key in UNITS ? key : undefined);
  if (unit === undefined) return '';
  if (field === 'utcS') return ['s', 'ms', 'us', 'ns'].includes(unit) ? unit : '';
  const quantity = QUANTITY[field];
  if (unit === 'cm') return quantity === 'length' ? unit : '';
  // "speed_ms" and "ms2" are metres a second, not milliseconds.
  if (unit === 'ms') return quantity === 'speed' ? 'm/s' : '';
  if (!(unit in UNITS)) return '';
  return UNITS[unit as Unit].quantity === quantity ? unit : '';
}

/** Factor from a unit to SI. */
export function factorOf(unit: string): number {
  return unit === 'cm' ? 0.01 : unit in UNITS ? UNITS[unit as Unit].toSi : 1;
}

interface Pattern {
  readonly field: ColumnField;
  /** Matches the whole header in lower case, words separated by one blank, unit and receiver prefix taken off. */
  readonly name: RegExp;
  /** Among several columns for one field the highest wins, then the first. */
  readonly rank: number;
}

const AXES = ['x', 'y', 'z'] as const;
const pattern = (field: ColumnField, name: string, rank = 1): Pattern => ({
  field,
  name: new RegExp(`^(?:${name})$`),
  rank,
});

const PATTERNS: readonly Pattern[] = [
  pattern('latHemisphere', 'n s|ns|lat(?:itude)? (?:hemisphere|dir(?:ection)?|ref)'),
  pattern('lonHemisphere', 'e w|ew|lon(?:g|gitude)? (?:hemisphere|dir(?:ection)?|ref)'),
  pattern('latDeg', 'lat(?:itude)?(?: n s)?(?: (?:wgs ?84|dd|decimal))?', 3),
  pattern('latDeg', 'breite(?:ngrad)?|y wgs ?84'),
  pattern('lonDeg', '(?:lon|long|lng|longitude)(?: e w)?(?: (?:wgs ?84|dd|decimal))?', 3),
  pattern('lonDeg', 'l(?:ä|ae)nge(?:ngrad)?|x wgs ?84'),
  pattern('utcS', '(?:date ?time|time ?stamp|time) utc|utc (?:date ?time|time ?stamp)|utc', 4),
  pattern(
    'utcS',
    'date ?time|time ?stamp|date and time|iso ?(?:time|8601)|(?:recorded|measured|created|sampled) at',
    3,
  ),
  pattern(
    'utcS',
    '(?:unix|epoch|posix)(?: time)?(?: ?stamp)?|millis|milliseconds|time(?: ?stamp)? (?:millis|epoch)',
    2,
  ),
  pattern('utcS', 'elapsed(?: time)?|seconds|secs|time since start|t', 0),
  pattern('timeOfDay', 'time|utc time|gmt time|zeit|uhrzeit|heure|hora|time of day|hhmmss'),
  pattern('date', '(?:utc |gmt )?date(?: utc)?|datum|fecha|day|ddmmyy|yymmdd|yyyymmdd'),
  pattern(
    'elevationM',
    'ele|elev|elevation|alt|altitude|height|h(?:ö|oe)he|(?:alt|altitude|height|elevation) (?:msl|asl|wgs ?84)|msl',
  ),
  pattern('speedMps', 'speed|velocity|ground ?speed|speed over ground|sog|spd|geschwindigkeit|vitesse|velocidad', 2),
  pattern('speedMps', 'v|vel|2d speed|speed 2d|h ?speed|horizontal speed'),
  pattern('courseRad', 'course|cog|course over ground|bearing|track angle|true course|kurs', 3),
  pattern('courseRad', 'heading|direction|azimuth|true heading|track|cap'),
  pattern(
    'accuracyM',
    'accuracy|h ?acc|horizontal accuracy|position accuracy|eph|epe|h ?pe|error|coordinate precision',
  ),
  pattern('hdop', 'hdop|h dop'),
  pattern(
    'satellites',
    '(?:nb ?|num ?|number of ?|n)?sat(?:s|ellites)?(?: (?:used|in use|used view|count|number))?|sv used',
  ),
  pattern('fixQuality', 'position type|fix(?: ?(?:type|quality|mode|status))?|quality|solution(?: type)?|valid|mode'),
  pattern('speedAccuracyMps', 'speed (?:accuracy|acc|error)|s ?acc'),
  pattern('courseAccuracyRad', '(?:course|bearing|heading) (?:accuracy|acc|error)'),
  pattern('segment', '(?:vehicle|train|bus|tram|device|unit|car|trip|drive|tracker|imei)(?: ?(?:id|no|number|name))?'),
  ...AXES.flatMap((axis) => {
    const upper = axis.toUpperCase() as 'X' | 'Y' | 'Z';
    const rate = { x: 'roll', y: 'pitch', z: 'yaw' }[axis];
    return [
      pattern(
        `accel${upper}`,
        `(?:a|acc|accel|acceleration|accelerometer|accelerometer acceleration) ?${axis}(?: axis)?`,
        2,
      ),
      pattern(`accel${upper}`, `(?:linear|user) ?(?:acc|accel|acceleration) ?${axis}|(?:acc|accel) ?user ?${axis}`),
      pattern(
        `gyro${upper}`,
        `(?:gyro|gyr|gyroscope|gyroscope rotation|rotation|rotation rate|rot|omega|angular velocity|w) ?${axis}(?: axis)?`,
        2,
      ),
      pattern(`gyro${upper}`, `${rate} ?rate|rate of ${rate}`),
    ];
  }),
];

export interface RecognisedHeader {
  readonly field: ColumnField;
  /** Unit stated in the header, or ''. */
  readonly unit: string;
  readonly rank: number;
}

/** `Speed(km/h)`, `gps_speed_mph`, `accelX [g]`, `GPS Speed` ... to a field and the unit the header states. */
export function recogniseHeader(header: string): RecognisedHeader | null {
  const words: string[] = [];
  const bracketed = /[([{]([^)\]}]*)[)\]}]/.exec(header);
  const spaced = header
    .replace(/[([{][^)\]}]*[)\]}]/g, ' ')
    .replace(/([a-zµ°])([A-Z])/g, '$1 $2')
    .toLowerCase();
  for (const word of spaced.split(/[\s_\-.:;,#"'/]+/)) if (word !== '') words.push(word);
  if (bracketed?.[1] !== undefined && /^(n\/s|e\/w)$/i.test(bracketed[1])) {
    words.push(...bracketed[1].toLowerCase().split('/'));
  }
  if (words.length > 1 && /^(gps|gnss|location|position|pos|geo|nmea)$/.test(words[0]!) && words[1] !== 'type') {
    words.shift();
  }
  const find = (name: string) => {
    let best: Pattern | null = null;
    for (const candidate of PATTERNS) {
      if (candidate.name.test(name) && (best === null || candidate.rank > best.rank)) best = candidate;
    }
    return best;
  };
  const whole = find(words.join(' '));
  if (whole !== null) {
    return { field: whole.field, unit: unitFor(whole.field, bracketed?.[1] ?? ''), rank: whole.rank };
  }
  // The last one or two words may be a unit: speed_km_h, gyro_z_deg_s, speed_mph.
  for (const taken of [1, 2]) {
    if (words.length <= taken) break;
    const found = find(words.slice(0, -taken).join(' '));
    if (found === null) continue;
    const unit = unitFor(found.field, words.slice(-taken).join('/'));
    if (unit !== '') return { field: found.field, unit, rank: found.rank };
  }
  return null;
}
