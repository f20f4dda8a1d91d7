import type { Finding } from '../../shared/model/finding.ts';
import { clock, counted, figure } from './text.ts';

const ORDER = { serious: 0, warning: 1, info: 2 };
const WORDS = { serious: 'Serious', warning: 'Check', info: 'Note' };
const PLACES_SHOWN = 3;

/** Findings, the serious ones first, each with its first places. */
export function Findings({ findings }: { readonly findings: readonly Finding[] }) {
  if (findings.length === 0) return <p class="quiet-text">Nothing was dropped or corrected.</p>;
  return (
    <ul class="findings">
      {[...findings]
        .sort((a, b) => ORDER[a.severity] - ORDER[b.severity])
        .map((f, i) => (
          <li key={i} class={f.severity}>
            <span class="finding-word">{WORDS[f.severity]}</span>
            <span>
              {f.message.replace(/\.?$/, '.')}
              {f.dropped > 0 && <span class="quiet-text"> {counted(f.dropped, 'fix', 'fixes')} dropped.</span>}
              <Places places={f.places} />
            </span>
          </li>
        ))}
    </ul>
  );
}

function Places({ places }: { readonly places: Finding['places'] }) {
  const texts = places.map(placeText).filter((text) => text !== '');
  if (texts.length === 0) return null;
  const rest = texts.length - PLACES_SHOWN;
  return (
    <span class="quiet-text">
      {' '}
      At {texts.slice(0, PLACES_SHOWN).join('; ')}
      {rest > 0 ? ` and ${String(rest)} more` : ''}.
    </span>
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
