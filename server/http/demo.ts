import { copyFile, readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { randomUUID } from 'node:crypto';
import { z } from 'zod';
import { parseCantRegister } from '../../shared/assess/index.ts';
import type { RecordingSummary } from '../../shared/schema/api.ts';
import { Mode } from '../../shared/schema/common.ts';
import { DEFAULT_SETUP } from '../catalogue.ts';
import type { JobQueue } from '../jobs/queue.ts';
import { PACKAGE_ROOT } from '../package-root.ts';
import { fingerprint } from '../store/raw-files.ts';
import type { Store } from '../store/store.ts';
import type { Book } from './book.ts';
import { incomingPath } from './uploads.ts';

/** data/demo/demo.json: what the demonstration consists of. */
const DemoManifest = z.object({
  operator: z.string(),
  line: z.string(),
  recordings: z.array(z.object({ file: z.string(), mode: Mode, title: z.string() })),
  register: z.object({ file: z.string(), name: z.string() }),
  note: z.string(),
});

const REGISTER_ID = 'demonstration';

/** Lists the demonstration's recordings and its cant register; what is there already stays. */
export async function loadDemo(store: Store, queue: JobQueue, book: Book): Promise<RecordingSummary[]> {
  const folder = join(PACKAGE_ROOT, 'data', 'demo');
  const manifest = DemoManifest.parse(JSON.parse(await readFile(join(folder, 'demo.json'), 'utf8')));
  const text = await readFile(join(folder, manifest.register.file), 'utf8');
  const { register } = parseCantRegister(text, { id: REGISTER_ID, name: manifest.register.name });
  await store.documents.put('register', REGISTER_ID, register);
  const present = (await store.recordings()).filter(({ demo }) => demo);
  const loaded: RecordingSummary[] = [];
  for (const { file, mode, title } of manifest.recordings) {
    const there = present.find(({ name }) => name === file);
    if (there !== undefined) {
      loaded.push(there);
      continue;
    }
    const id = randomUUID();
    const temporary = incomingPath(store);
    await copyFile(join(folder, file), temporary);
    const { bytes, sha256 } = await fingerprint(temporary);
    await store.addRecording(temporary, {
      id,
      name: file,
      title,
      bytes,
      sha256,
      uploadedUtcS: Date.now() / 1000,
      demo: true,
      mode,
      columns: {},
    });
    await book.putSetup({ ...DEFAULT_SETUP[mode], registerId: mode === 'rail' ? REGISTER_ID : null }, id);
    await queue.add(id);
    loaded.push((await store.recording(id))!);
  }
  return loaded;
}
