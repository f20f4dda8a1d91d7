import { notify } from '../state/app-state.ts';
import { saveText } from './save.ts';

/** Puts text on the clipboard and says so; where the browser forbids it, hands the text over as a file. */
export async function copyText(text: string, said: string): Promise<void> {
  try {
    await navigator.clipboard.writeText(text);
    notify(said);
  } catch {
    // No clipboard without a secure address or permission.
    saveText('copied.txt', text, 'text/plain');
    notify('This browser does not let the page copy: the text is saved as copied.txt instead');
  }
}
