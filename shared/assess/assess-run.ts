import type { Finding } from '../model/finding.ts';
import type { RunPassages } from '../model/passage.ts';
import type { AssessedCurve } from '../schema/curve-row.ts';
import type { Setup } from '../schema/setup.ts';
import { assessCurve, hasUsableLimit } from './assess-curve.ts';
import { registerFindings } from './cant/contradictions.ts';
import { curveCases } from './cases.ts';
import { cautionsFor } from './cautions.ts';

export interface AssessOptions {
  /**
   * Curves whose criteria get their working lines: all (true, the default), none, or those numbered. Figures are the
   * same
   * either way; without the lines a line of 500 curves recomputes within a frame or two.
   */
  readonly working?: boolean | readonly number[];
}

export interface RunAssessment {
  readonly curves: AssessedCurve[];
  readonly findings: Finding[];
  readonly cautions: string[];
}

/**
 * Verdicts for every curve of a run under a setup: the one function behind table, sheet, trials and exports.
 * Pure and quick enough for a page to call on every move of a slider. Never throws for measured data; what is missing
 * makes
 * a criterion `not assessed` with its reason.
 */
export function assessRun(passages: RunPassages, setup: Setup, options: AssessOptions = {}): RunAssessment {
  const { cases, resolved } = curveCases(passages, setup);
  const working = options.working ?? true;
  const curves = cases.map((curveCase) => {
    const withWorking = typeof working === 'boolean' ? working : working.includes(curveCase.facts.passage.curve.number);
    return assessCurve(passages.run, curveCase, setup, withWorking);
  });
  const findings: Finding[] = [];
  if (setup.register !== null && resolved !== null) {
    findings.push(
      ...registerFindings(
        setup.register,
        resolved,
        cases.map((c) => c.facts),
        setup,
      ),
    );
  }
  if (setup.limits.mode !== setup.mode) {
    findings.push(
      note(
        'assess/limits-of-other-mode',
        'serious',
        `The limit set "${setup.limits.name}" is for ${setup.limits.mode}, the assessment for ${setup.mode}`,
      ),
    );
  }
  if (!hasUsableLimit(setup)) {
    findings.push(
      note(
        'assess/no-limits',
        'serious',
        `The limit set "${setup.limits.name}" has no limit yet: nothing can be assessed against it`,
      ),
    );
  }
  return {
    curves,
    findings,
    cautions: cautionsFor(
      setup,
      cases.some((c) => c.isBound),
    ),
  };
}

function note(code: string, severity: Finding['severity'], message: string): Finding {
  return { code, stage: 'assess', severity, message, count: 1, dropped: 0, places: [] };
}
