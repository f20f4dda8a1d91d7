const ENTITIES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
};

/** Text for HTML and SVG, attribute values included: nothing a file contains may become markup. */
export function escapeMarkup(text: string): string {
  // eslint-disable-next-line no-control-regex -- characters that no markup may contain
  return text.replace(/[\u0000-\u0008\u000b\u000c\u000e-\u001f]/g, '').replace(/[&<>"']/g, (c) => ENTITIES[c]!);
}
