import { spawn, type ChildProcess } from 'node:child_process';
import { existsSync } from 'node:fs';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { z } from 'zod';
import { ErrorBody, RecordingSummary, UploadResult } from '../../shared/schema/api.ts';
import { ROOT } from './shared.ts';

/** Folder of the built program: the one that this file was built into, else `dist`, or another that the environment names. */
export const BUILD =
  process.env.BENDBOOK_BUILD ?? (existsSync(join(ROOT, 'server/main.js')) ? ROOT : join(ROOT, 'dist'));

export interface TestServer {
  readonly url: string;
  readonly dataDir: string;
  /** What it wrote on standard output and standard error so far. */
  output(): string;
  /** Ends it with a signal and waits for its end; returns the exit code. */
  end(signal?: NodeJS.Signals): Promise<number | null>;
}

/** A folder that `removeFolders` deletes. */
const folders: string[] = [];
export async function makeFolder(): Promise<string> {
  const folder = await mkdtemp(join(tmpdir(), 'bendbook-test-'));
  folders.push(folder);
  return folder;
}

export async function removeFolders(): Promise<void> {
  for (const folder of folders.splice(0)) await rm(folder, { recursive: true, force: true });
}

/** Starts the built server as its users do, on any free port unless `args` name one, and waits for its line. Throws with its output when it ends instead. */
export async function startServer(dataDir: string, args: readonly string[] = []): Promise<TestServer> {
  const main = join(BUILD, 'server/main.js');
  if (!existsSync(main)) throw new Error(`${main} is not there: run "npm run build" first`);
  const child = spawn(
    process.execPath,
    [main, ...(args.includes('--port') ? [] : ['--port', '0']), '--data', dataDir, ...args],
    {
      stdio: ['ignore', 'pipe', 'pipe'],
    },
  );
  let text = '';
  const ended = new Promise<number | null>((resolve) => child.on('exit', resolve));
  const url = await new Promise<string>((resolve, reject) => {
    const read = (chunk: Buffer) => {
      text += chunk.toString();
      const match = /ready at (http:\/\/\S+)/.exec(text);
      if (match !== null) resolve(match[1]!);
    };
    child.stdout.on('data', read);
    child.stderr.on('data', read);
    void ended.then((code) => reject(new Error(`the server ended with ${String(code)}: ${text}`)));
  });
  return { url, dataDir, output: () => text, end: (signal = 'SIGTERM') => endOf(child, ended, signal) };
}

async function endOf(child: ChildProcess, ended: Promise<number | null>, signal: NodeJS.Signals) {
  child.kill(signal);
  return await ended;
}

/** Sends a request and checks status and body against a schema. */
export async function call<T extends z.ZodType>(
  schema: T,
  address: string,
  init: RequestInit & { expect?: number } = {},
): Promise<z.infer<T>> {
  const response = await fetch(address, init);
  const text = await response.text();
  if (response.status !== (init.expect ?? 200)) {
    throw new Error(`${init.method ?? 'GET'} ${address} gave ${String(response.status)}: ${text.slice(0, 500)}`);
  }
  return schema.parse(JSON.parse(text));
}

/** The fault of a request that must fail with this status. */
export async function faultOf(address: string, expect: number, init: RequestInit = {}) {
  return (await call(ErrorBody, address, { ...init, expect })).fault;
}

export function jsonBody(method: string, body: unknown): RequestInit {
  return { method, body: JSON.stringify(body), headers: { 'content-type': 'application/json' } };
}

export interface UploadFile {
  readonly name: string;
  readonly content: string | Uint8Array<ArrayBuffer>;
}

export function multipart(files: readonly UploadFile[], columns?: unknown): FormData {
  const form = new FormData();
  for (const { name, content } of files) form.append('file', new Blob([content]), name);
  if (columns !== undefined) form.append('columns', JSON.stringify(columns));
  return form;
}

export async function upload(server: TestServer, files: readonly UploadFile[], columns?: unknown) {
  return await call(UploadResult, `${server.url}/api/recordings`, {
    method: 'POST',
    body: multipart(files, columns),
    expect: 201,
  });
}

/** Waits until the analysis of a recording has come to an end. */
export async function settled(server: TestServer, id: string): Promise<RecordingSummary> {
  for (;;) {
    const recording = await call(RecordingSummary, `${server.url}/api/recordings/${id}`);
    if (recording.state === 'ready' || recording.state === 'refused') return recording;
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}
