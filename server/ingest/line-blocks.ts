/** A line longer than this is not a line of a log. */
const MAX_LINE_BYTES = 1 << 20;

/**
 * Gathers chunks into blocks that end with the end of a line (LF, CR or CRLF), so that a reader never
 * sees half a line. The last block may lack its line end. Blocks share one buffer: use each before the next.
 * A run of MAX_LINE_BYTES without a line end is passed on as it is.
 */
export async function* lineBlocks(chunks: AsyncIterable<Uint8Array>): AsyncGenerator<Uint8Array> {
  let buffer = new Uint8Array(1 << 19);
  let held = 0;
  for await (const chunk of chunks) {
    if (held + chunk.length > buffer.length) {
      const larger = new Uint8Array(2 * (held + chunk.length));
      larger.set(buffer.subarray(0, held));
      buffer = larger;
    }
    buffer.set(chunk, held);
    const length = held + chunk.length;
    let end = length;
    // A CR at the very end may be the first half of CRLF: leave it for the next block.
    while (end > 0 && buffer[end - 1] !== 10 && !(buffer[end - 1] === 13 && end < length)) end--;
    if (end === 0 && length > MAX_LINE_BYTES) end = length;
    if (end > 0) yield buffer.subarray(0, end);
    buffer.copyWithin(0, end, length);
    held = length - end;
  }
  if (held > 0) yield buffer.subarray(0, held);
}
