import { useEffect, useRef } from 'preact/hooks';
import { observable, useSlice } from '../state/observable.ts';

interface Question {
  readonly text: string;
  /** What the button that goes ahead says: the deed itself, never "OK". */
  readonly action: string;
  readonly answer: (yes: boolean) => void;
}

const asked = observable<{ question: Question | null }>({ question: null });

/** Asks before something that cannot be undone; resolves to whether to go ahead. */
export function confirmAction(text: string, action: string): Promise<boolean> {
  return new Promise((resolve) => asked.set({ question: { text, action, answer: resolve } }));
}

/** The one place where such questions appear. */
export function ConfirmDialog() {
  const question = useSlice(asked, (s) => s.question);
  const dialog = useRef<HTMLDialogElement>(null);
  useEffect(() => {
    if (question !== null) dialog.current?.showModal();
  }, [question]);
  const close = (yes: boolean) => {
    question?.answer(yes);
    dialog.current?.close();
    asked.set({ question: null });
  };
  return (
    <dialog
      ref={dialog}
      class="ask"
      aria-label="Confirm"
      onCancel={(e) => {
        e.preventDefault();
        close(false);
      }}
    >
      <p>{question?.text}</p>
      <div class="row end">
        <button type="button" onClick={() => close(false)}>
          Keep
        </button>
        <button type="button" class="danger" onClick={() => close(true)}>
          {question?.action}
        </button>
      </div>
    </dialog>
  );
}
