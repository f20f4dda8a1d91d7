/** Server-sent events of one stream, by name, as they came (format: HTML Standard, 9.2 Server-sent events). */
export interface EventLog {
  of(name: string): unknown[];
  close(): void;
}

/** Opens a stream of events and gathers them. */
export async function readEvents(address: string): Promise<EventLog> {
  const abort = new AbortController();
  const response = await fetch(address, { signal: abort.signal, headers: { accept: 'text/event-stream' } });
  if (response.status !== 200 || response.body === null) throw new Error(`no events at ${address}`);
  const events: { name: string; body: unknown }[] = [];
  void gather(response.body, (name, data) => {
    events.push({ name, body: JSON.parse(data) as unknown });
  }).catch((error: unknown) => {
    if (!abort.signal.aborted && !/terminated/.test(String(error))) throw error;
  });
  return {
    of: (name) => events.filter((event) => event.name === name).map(({ body }) => body),
    close: () => abort.abort(),
  };
}

async function gather(body: ReadableStream<Uint8Array>, found: (name: string, data: string) => void): Promise<void> {
  let text = '';
  const decoder = new TextDecoder();
  for await (const chunk of body as unknown as AsyncIterable<Uint8Array>) {
    text += decoder.decode(chunk, { stream: true });
    const blocks = text.split('\n\n');
    text = blocks.pop()!;
    for (const block of blocks) {
      const lines = block.split('\n');
      const field = (name: string) =>
        lines
          .filter((line) => line.startsWith(`${name}:`))
          .map((line) => line.slice(name.length + 1).trimStart())
          .join('\n');
      if (field('data') !== '') found(field('event'), field('data'));
    }
  }
}
