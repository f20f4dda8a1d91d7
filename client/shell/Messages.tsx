import { figure } from '../parts/text.ts';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

/** What went wrong stays until it is put away; what was done says so for a moment. */
export function Messages() {
  const faults = useSlice(app, (s) => s.faults);
  const notice = useSlice(app, (s) => s.notice);
  const uploading = useSlice(app, (s) => s.uploading);
  return (
    <div class="messages">
      {uploading !== null && (
        <div class="message" role="status">
          <span class="grow">
            Receiving {uploading.names}: {figure(100 * uploading.share, 0)} %
          </span>
          <progress max={1} value={uploading.share} aria-label="Upload" />
          <button type="button" onClick={uploading.cancel}>
            Cancel
          </button>
        </div>
      )}
      {faults.map((fault, i) => (
        <div key={fault.code + fault.cause} class="message fault" role="alert">
          <p class="grow">
            <strong>
              {fault.place.file === undefined ? '' : `${fault.place.file}: `}
              {sentence(fault.cause)}
            </strong>{' '}
            {sentence(fault.remedy)}
          </p>
          <button type="button" class="quiet" onClick={() => app.set({ faults: faults.filter((_, k) => k !== i) })}>
            Put away
          </button>
        </div>
      ))}
      <div role="status" aria-live="polite">
        {notice !== null && <div class="message">{notice}</div>}
      </div>
    </div>
  );
}

/** First letter large, one full stop at the end. */
export function sentence(text: string): string {
  if (text === '') return '';
  const whole = text.charAt(0).toUpperCase() + text.slice(1);
  return /[.!?]$/.test(whole) ? whole : `${whole}.`;
}
