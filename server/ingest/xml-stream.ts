import { SaxesParser, type SaxesTagPlain } from 'saxes';
import type { ByteSource } from './byte-source.ts';
import { textChunks, type TextNote } from './encoding.ts';

/** Deeper nesting than any log needs. */
const MAX_DEPTH = 64;
/** Longest text of one element that is kept; more is cut. */
const MAX_TEXT = 1 << 16;
/** Characters of the longest entity, ampersand and semicolon included. */
const LONGEST_ENTITY = 34;
/** Damaged places after which the rest of a file is given up. */
const MAX_DAMAGES = 1000;

interface XmlDamage {
  /** 1-based line of the file. */
  readonly line: number;
  readonly cause: string;
}

export interface XmlHandler {
  /** Element opened; `name` without its namespace prefix. */
  open(name: string, attributes: Record<string, string>, line: number): void;
  /** Element closed, with the text directly in it since its last child (trimmed by nobody). */
  close(name: string, text: string): void;
  /**
   * The document is damaged here; reading goes on at the next start of `resumeAt`, with nothing open.
   * Drop what is half read.
   */
  damaged(damage: XmlDamage): void;
}

export interface XmlEnd {
  /** The file ends before its last element is closed: a recording cut off. */
  readonly cutOff: boolean;
  /** Damage after which the rest could not be read, or null. */
  readonly givenUp: XmlDamage | null;
  readonly lines: number;
}

function localName(name: string): string {
  const colon = name.indexOf(':');
  return colon < 0 ? name : name.slice(colon + 1);
}

/**
 * Reads XML in a stream, namespace prefixes stripped, entities of the document's own never expanded.
 * A damaged place does not end the reading: it goes on at the next start tag named in `resumeAt`
 * (`<trkpt`), so that one flipped byte costs one point and not the rest of the day.
 */
export async function readXml(
  source: ByteSource,
  note: TextNote,
  resumeAt: RegExp,
  handler: XmlHandler,
): Promise<XmlEnd> {
  let damages = 0;
  const state: { givenUp: XmlDamage | null; skipping: boolean } = { givenUp: null, skipping: false };
  let depth = 0;
  let text = '';
  let linesBefore = 0;
  let failure: string | null = null;

  const start = (fragment: boolean): SaxesParser<{ xmlns: false; fragment: boolean }> => {
    const parser = new SaxesParser<{ xmlns: false; fragment: boolean }>({ xmlns: false, fragment });
    depth = 0;
    text = '';
    const append = (more: string) => {
      if (text.length < MAX_TEXT) text = text === '' ? more : text + more;
    };
    parser.on('text', append);
    parser.on('cdata', append);
    parser.on('opentag', (tag: SaxesTagPlain) => {
      if (++depth > MAX_DEPTH) throw new Error(`elements are nested more than ${MAX_DEPTH} deep`);
      text = '';
      handler.open(localName(tag.name), tag.attributes, linesBefore + parser.line);
    });
    parser.on('closetag', (tag: SaxesTagPlain) => {
      depth--;
      handler.close(localName(tag.name), text);
      text = '';
    });
    parser.on('error', (error) => {
      // After resuming in the middle, the end tags of what was open before the damage come unannounced.
      if (fragment && error.message.includes('unmatched closing tag')) return;
      failure = error.message.replace(/^\d+:\d+: /, '');
      throw new XmlStop();
    });
    return parser;
  };

  let parser = start(false);
  // Characters given to this parser in earlier chunks.
  let given = 0;
  // The end of what was skipped, where a start tag may be cut by the end of a chunk.
  let tail = '';
  const feed = (chunk: string): void => {
    let rest = chunk;
    while (rest !== '' && state.givenUp === null) {
      if (state.skipping) {
        const searched = tail + rest;
        const found = searched.search(resumeAt);
        if (found < 0) {
          linesBefore += countNewlines(searched, 0, Math.max(0, searched.length - 16));
          tail = searched.slice(-16);
          return;
        }
        linesBefore += countNewlines(searched, 0, found);
        rest = searched.slice(found);
        tail = '';
        state.skipping = false;
        parser = start(true);
        given = 0;
      }
      try {
        failure = null;
        parser.write(rest);
        given += rest.length;
        return;
      } catch (error) {
        if (!(error instanceof XmlStop) && !(error instanceof Error && /nested/.test(error.message))) throw error;
        const damage: XmlDamage = {
          line: linesBefore + parser.line,
          cause: failure ?? (error instanceof Error ? error.message : 'damaged'),
        };
        handler.damaged(damage);
        if (++damages >= MAX_DAMAGES) {
          state.givenUp = damage;
          return;
        }
        // At least one character on, or the same damage would be met for ever.
        const stop = Math.min(rest.length, Math.max(1, parser.position - given));
        linesBefore += parser.line - 1;
        rest = rest.slice(stop);
        state.skipping = true;
        tail = '';
      }
    }
  };
  let held = '';
  for await (const chunk of textChunks(source, note)) {
    const whole = held + chunk;
    // An entity may be cut by the end of the chunk.
    const last = whole.lastIndexOf('&');
    const end = last >= 0 && whole.length - last < LONGEST_ENTITY ? last : whole.length;
    held = whole.slice(end);
    feed(escapeStray(whole.slice(0, end)));
    if (state.givenUp !== null) break;
  }
  if (state.givenUp === null) feed(escapeStray(held));
  let cutOff = false;
  if (state.givenUp === null && !state.skipping) {
    try {
      failure = null;
      parser.close();
    } catch {
      // What is missing at the end is the end: unclosed tags, a tag cut in half, an empty document.
      cutOff = true;
    }
  } else cutOff = true;
  return { cutOff, givenUp: state.givenUp, lines: linesBefore + parser.line };
}

class XmlStop extends Error {}

/**
 * Escapes ampersands that begin no entity: the parser would take all text up to the next semicolon, maybe the rest of
 * the file, for the name of one.
 */
function escapeStray(text: string): string {
  return text.includes('&') ? text.replace(/&(?!#?\w{1,30};)/g, '&amp;') : text;
}

function countNewlines(text: string, from: number, to: number): number {
  let count = 0;
  for (let at = text.indexOf('\n', from); at >= 0 && at < to; at = text.indexOf('\n', at + 1)) count++;
  return count;
}
