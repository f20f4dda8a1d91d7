import type { Verdict } from '../../shared/schema/common.ts';
import { figure } from '../parts/text.ts';

/** The bar ends here; what is higher is cut there. */
const FULL = 1.6;

/** Utilisation as a number and as a bar with a mark at the limit. */
export function UtilisationBar({ value, verdict }: { readonly value: number | null; readonly verdict: Verdict }) {
  const share = value === null ? 0 : Math.min(1, Math.max(0, value / FULL));
  return (
    <span class={`utilisation ${verdict.replace(' ', '-')}`}>
      <span class="utilisation-number">{figure(value, 2)}</span>
      <svg viewBox="0 0 64 12" preserveAspectRatio="none" aria-hidden="true">
        <rect class="bar-track" x="0" y="4.5" width="64" height="3" />
        <rect class="bar-fill" x="0" y="3" width={64 * share} height="6" />
        <rect class="bar-limit" x={64 / FULL - 0.5} y="0" width="1" height="12" />
      </svg>
    </span>
  );
}
