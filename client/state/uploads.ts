import { api, ApiError, upload } from '../api.ts';
import { app, refreshCatalogue, report } from './app-state.ts';

/** Sends files to the server; refusals are shown, the rest appears in the list as it is analysed. */
export function addFiles(files: readonly File[]): void {
  if (files.length === 0) return;
  const names = files.length === 1 ? files[0]!.name : `${String(files.length)} files`;
  const { done, cancel } = upload(files, (share) => {
    const now = app.get().uploading;
    if (now !== null) app.set({ uploading: { ...now, share } });
  });
  app.set({ uploading: { share: 0, names, cancel } });
  done
    .then(({ recordings, refused }) => {
      const known = new Set(app.get().recordings.map(({ id }) => id));
      app.set({
        recordings: [...app.get().recordings, ...recordings.filter(({ id }) => !known.has(id))],
        faults: [
          ...app.get().faults,
          ...refused.map(({ name, fault }) => ({ ...fault, place: { file: name, ...fault.place } })),
        ],
      });
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
    const known = new Set(app.get().recordings.map(({ id }) => id));
    app.set({ recordings: [...app.get().recordings, ...recordings.filter(({ id }) => !known.has(id))] });
    await refreshCatalogue();
  } catch (error) {
    report(error);
  }
}
