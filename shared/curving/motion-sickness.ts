/**
 * Weighting Wf of motion sickness, magnitude at a frequency (Hz): band limits 0.08 and 0.63 Hz (Butterworth),
 * transition at
 * 0.25 Hz (Q 0.86), upward step 0.0625 to 0.1 Hz (Q 0.8).
 * Source: ISO 2631-1:1997 / ISO 8041-1:2017 (parameters and table read in transcription).
 */
export function motionSicknessWeight(frequencyHz: number): number {
  const { bandLow, bandHigh, transition, step } = SECTIONS;
  return [bandLow, bandHigh, transition, step].reduce(
    (product, section) => product * magnitude(section, frequencyHz),
    1,
  );
}

/** A second-order section (n0 + n1 p + n2 p^2) / (d0 + d1 p + d2 p^2), p the Laplace variable, rad/s. */
interface Section {
  readonly n: readonly [number, number, number];
  readonly d: readonly [number, number, number];
}

function sections(): Record<'bandLow' | 'bandHigh' | 'transition' | 'step', Section> {
  const w = (f: number): number => 2 * Math.PI * f;
  const w1 = w(0.08);
  const w2 = w(0.63);
  const w4 = w(0.25);
  const w5 = w(0.0625);
  const w6 = w(0.1);
  return {
    bandLow: { n: [0, 0, 1], d: [w1 * w1, Math.SQRT2 * w1, 1] },
    bandHigh: { n: [w2 * w2, 0, 0], d: [w2 * w2, Math.SQRT2 * w2, 1] },
    // f3 is infinite for Wf, so the numerator is one.
    transition: { n: [w4 * w4, 0, 0], d: [w4 * w4, w4 / 0.86, 1] },
    step: { n: [w5 * w5, w5 / 0.8, 1], d: [w6 * w6, w6 / 0.8, 1] },
  };
}

const SECTIONS = sections();

function magnitude({ n, d }: Section, frequencyHz: number): number {
  const w = 2 * Math.PI * frequencyHz;
  return Math.hypot(n[0] - n[2] * w * w, n[1] * w) / Math.hypot(d[0] - d[2] * w * w, d[1] * w);
}

/** One section run over a column in place, bilinear transform at a step of `stepS`. */
function filterInPlace({ n, d }: Section, values: Float64Array, stepS: number): void {
  const k = 2 / stepS;
  const of = (c: readonly [number, number, number]): [number, number, number] => [
    c[0] + c[1] * k + c[2] * k * k,
    2 * c[0] - 2 * c[2] * k * k,
    c[0] - c[1] * k + c[2] * k * k,
  ];
  const b = of(n);
  const a = of(d);
  let x1 = 0;
  let x2 = 0;
  let y1 = 0;
  let y2 = 0;
  for (let i = 0; i < values.length; i++) {
    const x = values[i]!;
    const y = (b[0] * x + b[1] * x1 + b[2] * x2 - a[1] * y1 - a[2] * y2) / a[0];
    x2 = x1;
    x1 = x;
    y2 = y1;
    y1 = y;
    values[i] = y;
  }
}

/** Sampling of the weighting, s: twelve times above the upper band limit. */
const STEP_S = 0.125;

/**
 * Motion sickness dose MSDV = sqrt(integral of a_w^2 dt), m/s^1.5, of a lateral acceleration weighted by Wf.
 *
 * timeS: s, strictly increasing; accelerationMps2 of the same length, linear between; NaN is taken as 0 (nothing felt
 * is
 * known), so that a gap neither adds nor invents dose.
 * Wf and the dose are standardised for VERTICAL motion; lateral use is research practice: show it as a relative
 * indicator only,
 * never as a share of passengers.
 * Source: ISO 2631-1:1997, clause 9 (from memory).
 */
export function lateralMotionDose(timeS: ArrayLike<number>, accelerationMps2: ArrayLike<number>): number {
  const n = timeS.length;
  if (n < 2) return 0;
  const first = timeS[0]!;
  const count = Math.floor((timeS[n - 1]! - first) / STEP_S) + 1;
  const even = new Float64Array(count);
  let k = 0;
  for (let i = 0; i < count; i++) {
    const at = first + i * STEP_S;
    while (k < n - 2 && timeS[k + 1]! <= at) k++;
    const share = (at - timeS[k]!) / (timeS[k + 1]! - timeS[k]!);
    const value = accelerationMps2[k]! + (accelerationMps2[k + 1]! - accelerationMps2[k]!) * share;
    even[i] = Number.isNaN(value) ? 0 : value;
  }
  for (const section of Object.values(SECTIONS)) filterInPlace(section, even, STEP_S);
  let sum = 0;
  for (const a of even) sum += a * a;
  return Math.sqrt(sum * STEP_S);
}

/** Dose of a steady weighted acceleration: a_w sqrt(T), m/s^1.5. Source: ISO 2631-1:1997, clause 9 (from memory). */
export function steadyMotionDose(weightedRmsMps2: number, durationS: number): number {
  return weightedRmsMps2 * Math.sqrt(durationS);
}
