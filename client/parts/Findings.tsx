import type { Finding } from '../../shared/model/finding.ts';
import { clock, figure } from './text.ts';

const ORDER = { serious: 0, warning: 1, info: 2 };

/** Findings, the serious ones first, each with its first places. */
export function Findings({ findings }: { readonly findings: readonly Finding[] }) {
  if (findings.length === 0) return <p class="quiet-text">Nothing was dropped or corrected.</p>;
  return (
    <ul>
      {[...findings]
        .sort((a, b) => ORDER[a.severity] - ORDER[b.severity])
        .map((f, i) => (
          <li key={i}>
            <strong>{f.severity === 'info' ? '' : `${f.severity}: `}</strong>
            {f.message}
            {f.dropped > 0 && <span class="quiet-text"> ({f.dropped} fixes dropped)</span>}
            {f.places.length > 0 && (
              <span class="quiet-text">
                {' '}
                {f.places
                  .slice(0, 3)
                  .map(placeText)
                  .filter((t) => t !== '')
                  .join('; ')}
              </span>
            )}
          </li>
        ))}
    </ul>
  );
}

function placeText(place: Finding['places'][number]): string {
  const parts = [];
  if (place.line !== undefined) parts.push(`line ${String(place.line)}`);
  if (place.column !== undefined) parts.push(`column ${place.column}`);
  if (place.chainageM !== undefined) parts.push(`${figure(place.chainageM / 1000, 2)} km`);
  if (place.utcS !== undefined) parts.push(clock(place.utcS));
  return parts.join(', ');
}
