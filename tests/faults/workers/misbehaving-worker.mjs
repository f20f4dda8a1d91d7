// Stands in for the analysis thread; the name of the recording says how it fails.
export default async function misbehave({ name, port }) {
  port.postMessage({ stage: 'ingest', share: 0.1, bytesRead: 1, curvesFound: 0 });
  if (name === 'exits') process.exit(3);
  if (name === 'throws') throw new Error('something unforeseen');
  if (name === 'loops') for (;;);
  if (name === 'hoards') {
    const held = [];
    for (;;) held.push(new Array(1_000_000).fill({}));
  }
  port.close();
  return { fault: { code: 'ingest/not-a-log', cause: 'no log', place: { file: name }, remedy: 'another' } };
}
