import { nelderMead } from '../estimate/nelder-mead.ts';
import { Cholesky } from './cholesky.ts';
import type { StretchFit } from './fit-stretch.ts';
import { pointNoise, type NoiseParameters } from './noise.ts';
import type { NormalEquations, Use } from './normal-equations.ts';

/** Points times parameters looked at in one evaluation, at most: enough for a few per cent on every noise level. */
const MOST_WORK = 30_000;
const EVALUATIONS = 110;

/** Weak log-normal priors: value, log of the factor of one standard deviation. The position ones are centred on the smoother's. */
const PRIOR_LOG_SD: NoiseParameters = [Math.log(3.3), Math.log(4.5), Math.log(2.7), Math.log(2.7), Math.log(2.2)];
const DOPPLER_PRIOR = [Math.log(0.05), Math.log(0.04), Math.log(1)] as const;

/**
 * Noise of the log from the residuals of the fitted stretches, all held at their present solution: minimises the restricted
 * likelihood
 *
 *   sum over stretches of ln det V + r' V^-1 r - g' A^-1 g + ln det A,   plus priors
 *
 * where the last two terms give back the degrees of freedom that the parameters have eaten. It is read on these stiff fits, since
 * the smoother's own residuals have lost the slow part of the errors.
 *
 * @returns the parameters and how many scalar observations they rest on
 */
export function estimateNoise(
  fits: readonly StretchFit[],
  equations: NormalEquations,
  binS: number,
  use: Use,
  start: NoiseParameters,
): { parameters: NoiseParameters; observations: number } {
  const chosen = sample(fits);
  if (chosen.length === 0) return { parameters: start, observations: 0 };
  const cholesky = new Cholesky();
  const solution = new Float64Array(64);
  const free = use.course ? [0, 1, 2, 3, 4] : [0, 1];
  let observations = 0;
  // Linearised once: only the whitening depends on the noise.
  const held = chosen.map((fit) => equations.snapshot(fit));
  const value = (x: readonly number[]): number => {
    const p = withFree(start, free, x);
    const noise = pointNoise(p, binS);
    let sum = 0;
    observations = 0;
    for (const state of held) {
      equations.load(state);
      equations.whiten(noise, use, false);
      const n = equations.size;
      equations.A[0]! += 1 / 400;
      if (!cholesky.factor(equations.A, n, 0)) return Infinity;
      cholesky.solve(equations.g, solution);
      let explained = 0;
      for (let i = 0; i < n; i++) explained += equations.g[i]! * solution[i]!;
      sum += equations.logDet + equations.chi2 - explained + cholesky.logDet();
      observations += equations.observations;
    }
    for (const k of free) {
      const centre = k < 2 ? start[k]! : DOPPLER_PRIOR[k - 2]!;
      sum += ((p[k]! - centre) / PRIOR_LOG_SD[k]!) ** 2;
    }
    return sum;
  };
  const { x } = nelderMead(
    value,
    free.map((k) => start[k]!),
    free.map(() => 0.5),
    EVALUATIONS,
    0.05,
  );
  const parameters = withFree(start, free, x);
  return { parameters: clampParameters(parameters), observations };
}

function withFree(start: NoiseParameters, free: readonly number[], x: readonly number[]): NoiseParameters {
  const p: [number, number, number, number, number] = [...start];
  free.forEach((k, i) => {
    p[k] = x[i]!;
  });
  return clampParameters(p);
}

/** Bounds that no receiver passes: they keep the search where the filters are well behaved. */
function clampParameters(p: NoiseParameters): NoiseParameters {
  const within = (v: number, low: number, high: number) => Math.min(Math.log(high), Math.max(Math.log(low), v));
  return [
    within(p[0], 0.01, 30),
    within(p[1], 1e-5, 30),
    within(p[2], 0.003, 2),
    within(p[3], 0.003, 2),
    within(p[4], 0.1, 8),
  ];
}

/** Fits spread over the run whose work together stays within bounds. */
function sample(fits: readonly StretchFit[]): StretchFit[] {
  const work = (fit: StretchFit) => (fit.end - fit.first) * (fit.layout.size + 1);
  const total = fits.reduce((sum, fit) => sum + work(fit), 0);
  if (total <= MOST_WORK) return [...fits];
  const every = Math.ceil(total / MOST_WORK);
  return fits.filter((_, i) => i % every === 0);
}
