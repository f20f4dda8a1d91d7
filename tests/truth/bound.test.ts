import { describe, expect, it } from 'vitest';
import { drawLine, type DrawnLine } from '../../data/synthetic/families.ts';
import { arc, buildLine, clothoid, straight } from '../../data/synthetic/line.ts';
import { gaussMarkov, seededStream } from '../../data/synthetic/random.ts';
import { simulatePassage, simulateRun } from '../../data/synthetic/simulate.ts';
import {
  curveBounds,
  dopplerError,
  groupInformation,
  holdChainage,
  positionError,
  windowFixes,
  type Readings,
} from './bound.ts';
import { evaluateGroup, groupCurves } from './local-model.ts';
import { emptyInformation, invertInformation, Whitener, type AxisError } from './whitening.ts';

/** Standard deviation of the curvature of y = y0 + theta0 s + kappa s^2 / 2 from n equally spaced readings. */
function arcCurvatureVariance(n: number, lengthM: number, speedMps: number, error: AxisError): number {
  const out = emptyInformation(3);
  const filter = new Whitener(error, 3);
  for (let i = 0; i < n; i += 1) {
    const s = (lengthM * i) / (n - 1) - lengthM / 2;
    filter.add((s + lengthM / 2) / speedMps, 0, 1, [1, s, (s * s) / 2], 0, out);
  }
  return invertInformation(out.matrix, 3)![8]!;
}

describe('the whitening filter against closed forms of regression theory', () => {
  it('gives 720 sigma^2 (n-1)^3 / (L^4 (n-2) n (n+1)(n+2)) for white errors', () => {
    // Variance of the quadratic coefficient of orthogonal polynomials on n equally spaced points (from memory).
    const [n, L, sigma] = [37, 180, 0.6];
    const expected = (720 * sigma ** 2 * (n - 1) ** 3) / (L ** 4 * (n - 2) * n * (n + 1) * (n + 2));
    expect(arcCurvatureVariance(n, L, 20, { sigmaWhite: sigma, slow: [] }) / expected).toBeCloseTo(1, 8);
  });

  it('approaches 12 q / L^3 for a wandering error, whatever the rate', () => {
    // Wiener limit of the Gauss-Markov error: q = 2 sigma^2 / (tau v).
    const [L, v, sigma, tauS] = [60, 20, 2, 30_000];
    const expected = (12 * 2 * sigma ** 2) / (tauS * v * L ** 3);
    for (const n of [61, 241]) {
      const got = arcCurvatureVariance(n, L, v, { sigmaWhite: 1e-5, slow: [{ sigma, tauS }] });
      expect(got / expected).toBeGreaterThan(0.93);
      expect(got / expected).toBeLessThan(1.07);
    }
  });

  it('equals the dense formula (J V^-1 J) for white plus two Gauss-Markov parts', () => {
    const error: AxisError = {
      sigmaWhite: 0.4,
      slow: [
        { sigma: 1.5, tauS: 90 },
        { sigma: 0.8, tauS: 4 },
      ],
    };
    const n = 9;
    const times = Array.from({ length: n }, (_, i) => i + 0.3 * Math.sin(3 * i));
    const out = emptyInformation(2);
    const filter = new Whitener(error, 2);
    for (const t of times) filter.add(t, 0.6, 0.8, [1, t], 0, out);
    const V = new Float64Array(n * n);
    times.forEach((a, i) => {
      times.forEach((b, j) => {
        V[i * n + j] =
          error.slow.reduce((sum, part) => sum + part.sigma ** 2 * Math.exp(-Math.abs(a - b) / part.tauS), 0) +
          (i === j ? error.sigmaWhite ** 2 : 0);
      });
    });
    const W = invertInformation(V, n)!;
    const dense = (f: (t: number) => number, g: (t: number) => number) =>
      times.reduce((sum, a, i) => sum + times.reduce((inner, b, j) => inner + f(a) * W[i * n + j]! * g(b), 0), 0);
    const one = () => 1;
    const id = (t: number) => t;
    expect(out.matrix[0]! / dense(one, one)).toBeCloseTo(1, 9);
    expect(out.matrix[1]! / dense(one, id)).toBeCloseTo(1, 9);
    expect(out.matrix[3]! / dense(id, id)).toBeCloseTo(1, 9);
  });
});

describe('the local model against finite differences', () => {
  it('has the derivatives of its own positions and headings', () => {
    const sim = simulateRun('compound', { rateHz: 1, course: true }, 5, { curves: 4 });
    const group = groupCurves(sim.truth.curves, sim.truth.line.lengthM)[0]!;
    const s = windowFixes(sim, group).chainageM;
    const base = evaluateGroup(group, group.parameters, s);
    const size = group.parameters.length;
    for (let p = 0; p < size; p += 1) {
      const h = Math.max(Math.abs(group.parameters[p]!) * 1e-4, 1e-4);
      const up = group.parameters.slice();
      const down = group.parameters.slice();
      up[p]! += h;
      down[p]! -= h;
      const a = evaluateGroup(group, up, s);
      const b = evaluateGroup(group, down, s);
      let scale = 0;
      let worst = 0;
      for (let i = 0; i < s.length; i += 1) {
        const dx = (a.xM[i]! - b.xM[i]!) / (2 * h);
        const dy = (a.yM[i]! - b.yM[i]!) / (2 * h);
        scale = Math.max(scale, Math.hypot(dx, dy));
        worst = Math.max(worst, Math.hypot(dx - base.dx[i * size + p]!, dy - base.dy[i * size + p]!));
      }
      expect(worst, `parameter ${String(p)}`).toBeLessThan(2e-3 * scale);
    }
  });

  it('lies on the simulated line itself', () => {
    const sim = simulateRun('reverse', { rateHz: 1, course: true }, 9, { curves: 4 });
    const { line } = sim.truth;
    for (const group of groupCurves(sim.truth.curves, line.lengthM)) {
      const s = windowFixes(sim, group).chainageM;
      const values = evaluateGroup(group, group.parameters, s);
      const [x0, y0] = line.positionAt(group.fromM);
      const turn = line.headingAt(group.fromM);
      for (let i = 0; i < s.length; i += 1) {
        const [x, y] = line.positionAt(s[i]!);
        const along = (x - x0) * Math.cos(turn) + (y - y0) * Math.sin(turn);
        const across = -(x - x0) * Math.sin(turn) + (y - y0) * Math.cos(turn);
        expect(Math.hypot(values.xM[i]! - along, values.yM[i]! - across)).toBeLessThan(1e-3);
      }
    }
  });
});

/**
 * Ratio of the scatter of maximum-likelihood fits to the bound, for curvature and entry middle of the first curve.
 *
 * @param share size of the errors drawn, of those the bound is for: where the squared length of a transition would often
 * come out below zero the check is made with smaller errors, to which the bound is proportional
 */
function monteCarloRatio(drawn: DrawnLine, rateHz: number, course: boolean, draws: number, share: number) {
  const sim = simulatePassage(
    drawn,
    { rateHz, course, errors: { sigmaWhiteM: 0.5, sigmaWanderM: 1.5, wanderTimeS: 120, lagS: 0 } },
    17,
    PLACE,
  );
  const { errors } = sim.truth;
  const group = groupCurves(sim.truth.curves, sim.truth.line.lengthM)[0]!;
  const fixes = windowFixes(sim, group);
  const size = group.parameters.length;
  const noise = { position: positionError(errors, 0), doppler: course ? dopplerError(errors) : null };
  const truth = evaluateGroup(group, group.parameters, fixes.chainageM);
  const inform = (parameters: Float64Array, readings: Readings | null) => {
    const model = evaluateGroup(group, parameters, fixes.chainageM);
    const information = groupInformation(model, fixes, size, noise, readings);
    if (!course) holdChainage(information);
    return information;
  };
  const covariance = invertInformation(inform(group.parameters, null).matrix, size)!;
  const own = group.curveParameters[0]!;
  const random = seededStream(99);
  let curvature = 0;
  let middle = 0;
  let used = 0;
  for (let draw = 0; draw < draws; draw += 1) {
    const wander = [0, 1].map(() => gaussMarkov(random, fixes.timeS, errors.sigmaWanderM, errors.wanderTimeS));
    const slow = [0, 1].map(() => gaussMarkov(random, fixes.timeS, errors.sigmaDopplerSlowMps, errors.dopplerTimeS));
    const readings = {
      xM: truth.xM.map((x, i) => x + share * (wander[0]![i]! + errors.sigmaWhiteM * random.normal())),
      yM: truth.yM.map((y, i) => y + share * (wander[1]![i]! + errors.sigmaWhiteM * random.normal())),
      headingRad: truth.headingRad.map((theta, i) => {
        const ex = slow[0]![i]! + errors.sigmaDopplerWhiteMps * random.normal();
        const ey = slow[1]![i]! + errors.sigmaDopplerWhiteMps * random.normal();
        return theta + (share * (ey * Math.cos(theta) - ex * Math.sin(theta))) / fixes.speedMps[i]!;
      }),
    };
    const p = group.parameters.slice();
    let settled = false;
    for (let iteration = 0; iteration < 15 && !settled; iteration += 1) {
      const information = inform(p, readings);
      const inverse = invertInformation(information.matrix, size);
      if (!inverse) break;
      let largest = 0;
      for (let i = 0; i < size; i += 1) {
        let step = 0;
        for (let j = 0; j < size; j += 1) step += inverse[i * size + j]! * information.gradient[j]!;
        largest = Math.max(largest, Math.abs(step) / (share * Math.sqrt(covariance[i * size + i]!)));
        p[i]! += step;
      }
      settled = largest < 0.03;
    }
    if (!settled) continue;
    used += 1;
    const ratio2 = (index: number) =>
      (p[index]! - group.parameters[index]!) ** 2 / (share ** 2 * covariance[index * (size + 1)]!);
    curvature += ratio2(own.level);
    middle += ratio2(own.entry.middle);
  }
  return { curvature: Math.sqrt(curvature / used), middle: Math.sqrt(middle / used), used };
}

const PLACE = { name: 'bound', origin: { latDeg: 0, lonDeg: -20 }, startUtcS: 0 };

function simple(radiusM: number, arcM: number, transitionM: number, speedMps: number): DrawnLine {
  const k = 1 / radiusM;
  const drawn = drawLine('main', 1, seededStream(1));
  return {
    line: buildLine([
      straight(300),
      clothoid(transitionM, 0, k),
      arc(arcM, k),
      clothoid(transitionM, k, 0),
      straight(300),
    ]),
    plan: { ...drawn.plan, lineSpeedMps: speedMps, limits: [], stops: [], ripple: 0, terminalDwellS: null },
  };
}

const MAIN = simple(1500, 400, 100, 35);
const SECONDARY = simple(350, 150, 50, 18);
const TRAM = simple(40, 40, 8, 6);
const ROAD = simple(150, 60, 30, 18);

describe('the bound against Monte-Carlo with maximum-likelihood fits', () => {
  const cases = [
    ['main line R 1500, 1 Hz with course', MAIN, 1, true, 0.5],
    ['main line R 1500, 10 Hz with course', MAIN, 10, true, 0.5],
    ['main line R 1500, 1 Hz positions', MAIN, 1, false, 0.1],
    ['secondary R 350, 1 Hz with course', SECONDARY, 1, true, 0.5],
    ['tram R 40, 1 Hz with course', TRAM, 1, true, 0.1],
    ['tram R 40, 5 Hz with course', TRAM, 5, true, 0.2],
    ['tram R 40, 5 Hz positions', TRAM, 5, false, 0.03],
    ['road R 150, 1 Hz with course', ROAD, 1, true, 0.25],
    ['road R 150, 1 Hz positions', ROAD, 1, false, 0.05],
  ] as const;
  const draws = 220;
  // Standard error of a standard deviation from n draws is 1 / sqrt(2 n); three of them.
  const tolerance = 3 / Math.sqrt(2 * draws);

  for (const [name, drawn, rateHz, course, share] of cases) {
    it(`${name}: the scatter of fits equals the bound`, () => {
      const ratio = monteCarloRatio(drawn, rateHz, course, draws, share);
      expect(ratio.used).toBeGreaterThan(0.97 * draws);
      expect(Math.abs(ratio.curvature - 1)).toBeLessThan(tolerance);
      expect(Math.abs(ratio.middle - 1)).toBeLessThan(tolerance);
    });
  }
});

describe('the bound of whole curves', () => {
  // sd(R)/R %, sd(middle of transition) m, sd(transition length) m with white Doppler errors of 0.07 m/s, white position
  // errors of 0.5 m and a wander of 1.5 m over 120 s: an earlier calculation with another program, given to two digits.
  const published = [
    ['main line, 1 Hz', MAIN, 1, 0.7, 2.1, 22],
    ['main line, 10 Hz', MAIN, 10, 0.22, 0.7, 7],
    ['secondary, 1 Hz', SECONDARY, 1, 0.96, 1.1, 10],
    ['secondary, 10 Hz', SECONDARY, 10, 0.31, 0.4, 3],
    ['tram, 10 Hz', TRAM, 10, 0.46, 0.13, 1.5],
    ['road, 10 Hz', ROAD, 10, 0.5, 0.25, 1.9],
  ] as const;
  for (const [name, drawn, rateHz, radiusPercent, middleM, lengthM] of published) {
    it(`${name}: agrees with an independent calculation`, () => {
      const errors = {
        sigmaWhiteM: 0.5,
        sigmaWanderM: 1.5,
        wanderTimeS: 120,
        lagS: 0,
        sigmaDopplerWhiteMps: 0.07,
        sigmaDopplerSlowMps: 0,
      };
      const bound = curveBounds(simulatePassage(drawn, { rateHz, course: true, errors }, 17, PLACE))[0]!;
      const relative = 100 * bound.radiusSdM * Math.abs(bound.curve.curvaturePerM);
      expect(relative / radiusPercent).toBeGreaterThan(0.93);
      expect(relative / radiusPercent).toBeLessThan(1.07);
      expect(bound.entry.middleSdM / middleM).toBeGreaterThan(0.85);
      expect(bound.entry.middleSdM / middleM).toBeLessThan(1.15);
      expect(bound.entry.lengthSdM / lengthM).toBeGreaterThan(0.85);
      expect(bound.entry.lengthSdM / lengthM).toBeLessThan(1.15);
    });
  }
});
