/** Asks before something that cannot be undone. */
export function confirmAction(question: string): boolean {
  return window.confirm(question);
}
