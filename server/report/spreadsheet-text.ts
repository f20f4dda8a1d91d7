/**
 * Text made safe to open in a spreadsheet: a cell that begins with = + - @, a tab or a return
 * would be run as a formula, so it is given a leading apostrophe. Control characters go.
 */
export function spreadsheetText(text: string): string {
  // eslint-disable-next-line no-control-regex -- control characters are what this removes
  const clean = text.replace(/[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f]/g, '');
  return /^[=+\-@\t\r]/.test(clean) ? `'${clean}` : clean;
}
