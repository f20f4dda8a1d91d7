import { ENCODING_NAMES, type TextNote } from './encoding.ts';
import { counted, type FindingLog } from './finding-log.ts';
import type { XmlEnd } from './xml-stream.ts';

/**
 * Notes how an XML log ended: cut off, given up, with characters that are none.
 * @param halfRead Points lost at the cut.
 */
export function noteXmlEnd(log: FindingLog, end: XmlEnd, note: TextNote, file: string, halfRead: number): void {
  if (end.cutOff) {
    log.note(
      'cut-off',
      'warning',
      () => 'The file ends before its end: the recording was cut off; all points up to there are kept',
      { file, line: end.lines },
      halfRead,
    );
  }
  if (end.givenUp !== null) {
    log.note('given-up', 'serious', () => 'Too many damaged places: the rest of the file was not read', {
      file,
      line: end.givenUp.line,
    });
  }
  if (note.replaced > 0) {
    log.note(
      'bad-characters',
      'warning',
      (n) => `${counted(n, 'byte')} that are no ${ENCODING_NAMES[note.encoding]} character`,
      { file },
      0,
      note.replaced,
    );
  }
}
