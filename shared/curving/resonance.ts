import { driveRatioOfPeak } from './roll-oscillator.ts';

/**
 * Speed at which excitations repeated every `spacingM` meet the driven peak of the roll:
 * v = lambda f0 sqrt(1 - 2 zeta^2) / k, k the harmonic (1 for the fundamental), m/s.
 * 0 when the damping leaves no peak. Source: f = v / lambda; joint spacing as excitation (read: rail joints and rock-
 * off).
 */
export function criticalSpeedMps(spacingM: number, frequencyHz: number, dampingRatio: number, harmonic = 1): number {
  return (spacingM * frequencyHz * driveRatioOfPeak(dampingRatio)) / harmonic;
}

/** A stretch of the run where an excitation meets the natural frequency. */
export interface ResonantStretch {
  readonly fromM: number;
  readonly toM: number;
  /** Speeds to avoid, m/s. */
  readonly avoidLowMps: number;
  readonly avoidHighMps: number;
  readonly harmonic: number;
}

/**
 * Half-power band of an oscillator, as ratios of frequency to its natural frequency: 1 -/+ zeta, never narrower than
 * 5 %,
 * since neither the vehicle's frequency nor the speed is known better. Common practice, no source.
 */
export function resonanceBand(dampingRatio: number): readonly [low: number, high: number] {
  const half = Math.min(Math.max(dampingRatio, 0.05), 0.5);
  return [1 - half, 1 + half];
}

/**
 * Stretches of a run on which the frequency v / spacing lies in the resonance band for long enough to build up.
 *
 * chainageM m and speedMps m/s, of one length, chainage rising; spacingM: distance of regular irregularities (rail
 * joints, expansion joints), m; stretches shorter than `cycles` spacings are left out. NaN speeds end a stretch.
 * Source: f = v / lambda.
 */
export function resonantStretches(
  chainageM: ArrayLike<number>,
  speedMps: ArrayLike<number>,
  spacingM: number,
  frequencyHz: number,
  dampingRatio: number,
  cycles = 3,
): ResonantStretch[] {
  const critical = criticalSpeedMps(spacingM, frequencyHz, dampingRatio);
  if (critical === 0) return [];
  const [low, high] = resonanceBand(dampingRatio);
  const found: ResonantStretch[] = [];
  let first = -1;
  for (let i = 0; i <= chainageM.length; i++) {
    const inside = i < chainageM.length && speedMps[i]! >= low * critical && speedMps[i]! <= high * critical;
    if (inside && first < 0) first = i;
    if (!inside && first >= 0) {
      const fromM = chainageM[first]!;
      const toM = chainageM[i - 1]!;
      if (toM - fromM >= cycles * spacingM) {
        found.push({ fromM, toM, avoidLowMps: low * critical, avoidHighMps: high * critical, harmonic: 1 });
      }
      first = -1;
    }
  }
  return found;
}
