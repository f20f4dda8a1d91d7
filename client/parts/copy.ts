import { notify } from '../state/app-state.ts';

/** Puts text on the clipboard and says so; where the browser forbids it, selects it in a field to copy from. */
export async function copyText(text: string, said: string): Promise<void> {
  try {
    await navigator.clipboard.writeText(text);
  } catch {
    // No clipboard without a secure address: the old way still works there.
    const field = document.createElement('textarea');
    field.value = text;
    field.className = 'sr';
    document.body.append(field);
    field.select();
    const isCopied = document.execCommand('copy');
    field.remove();
    if (!isCopied) {
      notify('This browser does not let the page copy');
      return;
    }
  }
  notify(said);
}
