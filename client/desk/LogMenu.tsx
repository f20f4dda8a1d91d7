import { Findings } from '../parts/Findings.tsx';
import { counted, duration, figure, quantity } from '../parts/text.ts';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** How good the log is, in numbers, and what was noticed on the way. */
export function LogMenu({ open }: { readonly open: OpenRun }) {
  const units = useSlice(app, (s) => s.units);
  const { summary, quality } = open.detail;
  const { noise } = quality;
  const serious = open.findings.filter(({ severity }) => severity === 'serious').length;
  return (
    <details class="menu">
      <summary>
        <span class="ellipsis">
          Log: {figure(quality.rateHz, quality.rateHz < 1 ? 2 : 0)} Hz, {counted(open.findings.length, 'finding')}
          {serious > 0 ? `, ${String(serious)} serious` : ''}
        </span>
      </summary>
      <div class="wide-menu text" tabIndex={0} role="region" aria-label="Log and findings">
        <h2>The log</h2>
        <dl class="pairs">
          <dt>Run</dt>
          <dd>
            {quantity(summary.lengthM / 1000, 'km', 2, units)} in {duration(summary.durationS)}, top{' '}
            {quantity(summary.topSpeedKmh, 'km/h', 1, units)}
          </dd>
          <dt>Fixes</dt>
          <dd>
            {figure(summary.fixCount, 0)} at {figure(quality.rateHz, 1)} Hz, worth about{' '}
            {figure(quality.effectiveFixes, 0)} independent ones
          </dd>
          <dt>Channels</dt>
          <dd>
            course on {figure(100 * quality.courseShare, 0)} %, speed on {figure(100 * quality.speedShare, 0)} % of the
            moving fixes
          </dd>
          <dt>Position noise</dt>
          <dd>
            {figure(noise.sigmaWhiteM, 2)} m from fix to fix, wandering {figure(noise.sigmaWanderM, 1)} m over{' '}
            {figure(noise.wanderTimeS, 0)} s
          </dd>
          {noise.sigmaDopplerWhiteMps > 0 && (
            <>
              <dt>Course and speed noise</dt>
              <dd>
                {figure(noise.sigmaDopplerWhiteMps, 3)} m/s from fix to fix, {figure(noise.sigmaDopplerSlowMps, 3)} m/s
                over {figure(noise.dopplerTimeS, 1)} s
              </dd>
            </>
          )}
          <dt>Resolving power</dt>
          <dd>
            over 100 m a bend is told from straight up to R {quantity(1 / quality.smallestCurvaturePerM, 'm', 0, units)}
          </dd>
        </dl>
        <h2>Findings</h2>
        <Findings findings={open.findings} />
      </div>
    </details>
  );
}
