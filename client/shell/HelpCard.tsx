import type { RefObject } from 'preact';
import { KEYS } from './shortcuts.ts';

/** The keys, and where to find what. */
export function HelpCard({ dialog }: { readonly dialog: RefObject<HTMLDialogElement | null> }) {
  return (
    <dialog ref={dialog} aria-labelledby="help-title">
      <div class="row">
        <h2 id="help-title" class="grow">
          Keys
        </h2>
        <form method="dialog">
          <button type="submit">Close</button>
        </form>
      </div>
      <table class="plain keys">
        <tbody>
          {KEYS.map(([keys, what]) => (
            <tr key={what}>
              <th scope="row">
                {keys.map((key) => (
                  <kbd key={key}>{key}</kbd>
                ))}
              </th>
              <td>{what}</td>
            </tr>
          ))}
        </tbody>
      </table>
      <p class="quiet-text">
        Files may be dropped anywhere on the page. The address of the page holds run, curve and window: send it to a
        colleague on the same server, or keep it as a bookmark.
      </p>
    </dialog>
  );
}
