import { useState } from 'preact/hooks';

/** A copy to edit: changed only when it says something else than what is kept, whatever object that stands in. */
export function useDraft<T>(kept: T): {
  readonly draft: T;
  readonly isChanged: boolean;
  readonly setDraft: (next: T) => void;
  readonly undo: () => void;
} {
  const [draft, setDraft] = useState(kept);
  return {
    draft,
    isChanged: JSON.stringify(draft) !== JSON.stringify(kept),
    setDraft: (next) => setDraft(() => next),
    undo: () => setDraft(() => kept),
  };
}
