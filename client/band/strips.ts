/** One line in a strip: a column of the profile and its factor to the strip's unit. */
export interface Trace {
  readonly column: string;
  readonly label: string;
  readonly factor: number;
  readonly style: 'main' | 'estimate' | 'second' | 'measured';
  /** Column of standard deviations, drawn as a 95 % interval. */
  readonly sd?: string;
}

export interface Strip {
  readonly id: string;
  readonly title: string;
  readonly unit: string;
  readonly decimals: number;
  readonly signed: boolean;
  readonly traces: readonly Trace[];
  /** Criterion whose limit is drawn. */
  readonly criterion: string | null;
  /** The scale never shrinks below this. */
  readonly least: number;
}

const CURVATURE: Strip = {
  id: 'curvature',
  title: 'Curvature, left +',
  unit: '1/km',
  decimals: 2,
  signed: true,
  traces: [
    { column: 'curvature_1_m', label: 'estimate', factor: 1000, style: 'estimate', sd: 'curvature_sd_1_m' },
    { column: 'curvature_fit_1_m', label: 'fitted', factor: 1000, style: 'main' },
  ],
  criterion: null,
  least: 0.2,
};
const SPEED: Strip = {
  id: 'speed',
  title: 'Speed',
  unit: 'km/h',
  decimals: 1,
  signed: false,
  traces: [
    { column: 'limit_speed_kmh', label: 'complying', factor: 1, style: 'second' },
    { column: 'speed_ms', label: 'recorded', factor: 3.6, style: 'main', sd: 'speed_sd_ms' },
  ],
  criterion: null,
  least: 20,
};
const CANT: Strip = {
  id: 'cant',
  title: 'Cant and equilibrium cant',
  unit: 'mm',
  decimals: 0,
  signed: false,
  traces: [
    { column: 'equilibrium_cant_mm', label: 'equilibrium', factor: 1, style: 'second' },
    { column: 'cant_mm', label: 'cant', factor: 1, style: 'main' },
  ],
  criterion: 'cant',
  least: 50,
};
const DEFICIENCY: Strip = {
  id: 'deficiency',
  title: 'Cant deficiency, excess −',
  unit: 'mm',
  decimals: 0,
  signed: true,
  traces: [{ column: 'cant_deficiency_mm', label: 'deficiency', factor: 1, style: 'main' }],
  criterion: 'cant_deficiency',
  least: 50,
};
const LATERAL: Strip = {
  id: 'lateral',
  title: 'Lateral acceleration',
  unit: 'm/s²',
  decimals: 2,
  signed: true,
  traces: [
    { column: 'lateral_measured_ms2', label: 'measured', factor: 1, style: 'measured' },
    { column: 'lateral_body_ms2', label: 'body', factor: 1, style: 'second' },
    { column: 'lateral_track_ms2', label: 'track plane', factor: 1, style: 'main', sd: 'lateral_track_sd_ms2' },
  ],
  criterion: 'lateral_track',
  least: 0.3,
};
const JERK: Strip = {
  id: 'jerk',
  title: 'Lateral jerk',
  unit: 'm/s³',
  decimals: 2,
  signed: true,
  traces: [{ column: 'jerk_ms3', label: 'jerk', factor: 1, style: 'main' }],
  criterion: 'jerk',
  least: 0.2,
};
const ELEVATION: Strip = {
  id: 'elevation',
  title: 'Elevation',
  unit: 'm',
  decimals: 0,
  signed: false,
  traces: [{ column: 'ele_m', label: 'elevation', factor: 1, style: 'main' }],
  criterion: null,
  least: 5,
};

/** Strips of a mode in their order. */
export function stripsOf(mode: 'rail' | 'road'): readonly Strip[] {
  return mode === 'rail'
    ? [CURVATURE, SPEED, CANT, DEFICIENCY, LATERAL, JERK, ELEVATION]
    : [CURVATURE, SPEED, LATERAL, JERK, ELEVATION];
}

/** Strips shown until the user chooses. */
export const SHOWN_FIRST: Readonly<Record<'rail' | 'road', readonly string[]>> = {
  rail: ['curvature', 'speed', 'deficiency', 'lateral'],
  road: ['curvature', 'speed', 'lateral'],
};
