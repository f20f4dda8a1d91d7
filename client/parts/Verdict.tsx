import type { Verdict as VerdictWord } from '../../shared/schema/common.ts';

/** A verdict as sign and word: the colour is never the only sign. */
export function Verdict({ verdict }: { readonly verdict: VerdictWord }) {
  return (
    <span class={`verdict ${verdict.replace(' ', '-')}`}>
      <Sign verdict={verdict} />
      {verdict}
    </span>
  );
}

function Sign({ verdict }: { readonly verdict: VerdictWord }) {
  return (
    <svg viewBox="0 0 12 12" aria-hidden="true" fill="none" stroke="currentColor" stroke-width="1.8">
      {verdict === 'over' && <path d="M6 0.8 11.4 11H0.6Z" fill="currentColor" stroke="none" />}
      {verdict === 'undecided' && <path d="M1.5 4.2h9M1.5 8h9" stroke-dasharray="2.6 1.6" />}
      {verdict === 'within' && <path d="M1.5 6.4 4.6 9.6 10.5 2.6" />}
      {verdict === 'not assessed' && <circle cx="6" cy="6" r="4.4" />}
    </svg>
  );
}
