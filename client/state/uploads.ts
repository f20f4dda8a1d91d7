import { api, ApiError, upload } from '../api.ts';
import { counted } from '../parts/text.ts';
import { app, notify, report, showFault } from './app-state.ts';
import { refreshCatalogue } from './open-run.ts';

/** Sends files to the server; refusals are shown, the rest appears in the list as it is analysed. */
export function addFiles(files: readonly File[]): void {
  if (files.length === 0) return;
  if (app.get().uploading !== null) {
    notify('One transfer at a time: wait for the files on their way, or cancel them');
    return;
  }
  const names = files.length === 1 ? files[0]!.name : counted(files.length, 'file');
  const { done, cancel } = upload(files, (share) => {
    const now = app.get().uploading;
    if (now !== null) app.set({ uploading: { ...now, share } });
  });
  app.set({ uploading: { share: 0, names, cancel } });
  done
    .then(({ recordings, refused }) => {
      listNew(recordings);
      for (const { name, fault } of refused) showFault({ ...fault, place: { file: name, ...fault.place } });
      if (recordings.length > 0 && app.get().runId !== null) {
        notify(`${counted(recordings.length, 'recording')} added: the analysis is on its way`);
      }
    })
    .catch((error: unknown) => {
      if (error instanceof ApiError && error.fault.code === 'page/cancelled') return;
      report(error);
    })
    .finally(() => app.set({ uploading: null }));
}

export async function loadDemo(): Promise<void> {
  try {
    const { recordings } = await api.demo();
    listNew(recordings);
    await refreshCatalogue();
  } catch (error) {
    report(error);
  }
}

/** Events may have told of a recording before the answer did. */
function listNew(recordings: Awaited<ReturnType<typeof api.demo>>['recordings']): void {
  const known = new Set(app.get().recordings.map(({ id }) => id));
  app.set({ recordings: [...app.get().recordings, ...recordings.filter(({ id }) => !known.has(id))] });
}
