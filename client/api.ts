import type { z } from 'zod';
import type {
  AssessmentBody,
  Catalogue,
  ColumnNames,
  ColumnPreview,
  ErrorBody,
  Job,
  ProfileWindow,
  RecordingSummary,
  RegisterUpload,
  RunDetail,
  RunSummary,
  UploadResult,
} from '../shared/schema/api.ts';
import type { CantRegister } from '../shared/schema/cant-register.ts';
import type { LimitSet } from '../shared/schema/limit-set.ts';
import type { SetupRef } from '../shared/schema/setup.ts';
import type { Vehicle } from '../shared/schema/vehicle.ts';

export type Fault = z.infer<typeof ErrorBody>['fault'];
export type Upload = z.infer<typeof UploadResult>;

/** A refused request: cause and remedy as the server tells them. */
export class ApiError extends Error {
  readonly fault: Fault;

  constructor(fault: Fault) {
    super(fault.cause);
    this.name = 'ApiError';
    this.fault = fault;
  }
}

const UNREACHABLE: Fault = {
  code: 'page/no-server',
  cause: 'the server does not answer',
  place: {},
  remedy: 'Check that Bendbook is still running, then try again',
};

async function request<T>(path: string, init: RequestInit = {}): Promise<T> {
  let response: Response;
  try {
    response = await fetch(`/api${path}`, init);
  } catch (error) {
    if (init.signal?.aborted === true) throw error;
    throw new ApiError(UNREACHABLE);
  }
  if (!response.ok) throw new ApiError(await faultOf(response));
  return (response.status === 204 ? undefined : await response.json()) as T;
}

async function faultOf(response: Response): Promise<Fault> {
  const body = (await response.json().catch(() => null)) as { fault?: Fault } | null;
  return (
    body?.fault ?? { ...UNREACHABLE, code: 'page/answer', cause: `the server answered ${String(response.status)}` }
  );
}

function send(method: string, body: unknown): RequestInit {
  return { method, headers: { 'Content-Type': 'application/json' }, body: JSON.stringify(body) };
}

const id = encodeURIComponent;

export const api = {
  recordings: () => request<RecordingSummary[]>('/recordings'),
  recording: (key: string) => request<RecordingSummary>(`/recordings/${id(key)}`),
  removeRecording: (key: string) => request<undefined>(`/recordings/${id(key)}`, { method: 'DELETE' }),
  preview: (key: string) => request<ColumnPreview>(`/recordings/${id(key)}/preview`),
  nameColumns: (key: string, names: ColumnNames) => request<Job>(`/recordings/${id(key)}/columns`, send('PUT', names)),
  analyse: (key: string) => request<Job>(`/recordings/${id(key)}/analyse`, { method: 'POST' }),
  demo: () => request<Upload>('/demo', { method: 'POST' }),
  jobs: () => request<Job[]>('/jobs'),
  cancel: (key: string) => request<Job>(`/jobs/${id(key)}`, { method: 'DELETE' }),
  runs: () => request<RunSummary[]>('/runs'),
  run: (key: string) => request<RunDetail>(`/runs/${id(key)}`),
  profile: (key: string, from: number, to: number, points: number, signal?: AbortSignal) =>
    request<ProfileWindow>(
      `/runs/${id(key)}/profile?from=${from.toFixed(2)}&to=${to.toFixed(2)}&points=${String(Math.round(points))}`,
      signal === undefined ? {} : { signal },
    ),
  assessment: (key: string, setup: SetupRef) =>
    request<AssessmentBody>(`/runs/${id(key)}/assessment`, send('POST', setup)),
  catalogue: () => request<Catalogue>('/catalogue'),
  putSetup: (setup: SetupRef, runId: string) => request<SetupRef>(`/setup?run=${id(runId)}`, send('PUT', setup)),
  putLimitSet: (set: LimitSet) => request<LimitSet>(`/limit-sets/${id(set.id)}`, send('PUT', set)),
  removeLimitSet: (key: string) => request<undefined>(`/limit-sets/${id(key)}`, { method: 'DELETE' }),
  putVehicle: (vehicle: Vehicle) => request<Vehicle>(`/vehicles/${id(vehicle.id)}`, send('PUT', vehicle)),
  removeVehicle: (key: string) => request<undefined>(`/vehicles/${id(key)}`, { method: 'DELETE' }),
  addRegister: (name: string, text: string) =>
    request<RegisterUpload>(`/registers?name=${id(name)}`, {
      method: 'POST',
      headers: { 'Content-Type': 'text/csv' },
      body: text,
    }),
  putRegister: (register: CantRegister) =>
    request<CantRegister>(`/registers/${id(register.id)}`, send('PUT', register)),
  removeRegister: (key: string) => request<undefined>(`/registers/${id(key)}`, { method: 'DELETE' }),
  exportUrl: (runId: string, file: string) => `/api/runs/${id(runId)}/${file}`,
};

/** Uploads files with progress; the returned function cancels. */
export function upload(
  files: readonly File[],
  onProgress: (share: number) => void,
): { done: Promise<Upload>; cancel: () => void } {
  const xhr = new XMLHttpRequest();
  const done = new Promise<Upload>((resolve, reject) => {
    xhr.open('POST', '/api/recordings');
    xhr.responseType = 'json';
    xhr.upload.onprogress = (event) => {
      if (event.lengthComputable) onProgress(event.loaded / event.total);
    };
    xhr.onload = () => {
      const body = xhr.response as (Upload & { fault?: Fault }) | null;
      if (xhr.status < 300 && body !== null) resolve(body);
      else reject(new ApiError(body?.fault ?? UNREACHABLE));
    };
    xhr.onerror = () => {
      reject(new ApiError(UNREACHABLE));
    };
    xhr.onabort = () => {
      reject(
        new ApiError({
          code: 'page/cancelled',
          cause: 'the upload was cancelled',
          place: {},
          remedy: 'Choose the file again',
        }),
      );
    };
    const form = new FormData();
    for (const file of files) form.append('file', file, file.name);
    xhr.send(form);
  });
  return { done, cancel: () => xhr.abort() };
}

/** Follows what the server tells; reconnects by itself. */
export function followEvents(on: {
  opened: () => void;
  job: (job: Job) => void;
  recording: (recording: RecordingSummary) => void;
  removed: (key: string) => void;
}): void {
  const source = new EventSource('/api/events');
  source.addEventListener('open', on.opened);
  const listen = (name: string, act: (body: unknown) => void) => {
    source.addEventListener(name, (event: MessageEvent<string>) => {
      act(JSON.parse(event.data));
    });
  };
  listen('job', (body) => on.job(body as Job));
  listen('recording', (body) => on.recording(body as RecordingSummary));
  listen('removed', (body) => on.removed((body as { id: string }).id));
}
