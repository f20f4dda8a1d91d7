import { BUILT_IN, DEFAULT_SETUP, resolveSetup, type Documents } from '../catalogue.ts';
import { profileTable, reportContext, type AssessableRun } from '../assessment.ts';
import type { ReportContext, ProfileTable } from '../report/index.ts';
import type { Store, StoredRun } from '../store/store.ts';
import { CantRegister } from '../../shared/schema/cant-register.ts';
import type { Mode } from '../../shared/schema/common.ts';
import { LimitSet } from '../../shared/schema/limit-set.ts';
import { SetupRef, type Setup } from '../../shared/schema/setup.ts';
import { Vehicle } from '../../shared/schema/vehicle.ts';
import { notFound } from './faults.ts';

/** Profile tables of this many runs are kept ready: panning asks for window after window. */
const READY_TABLES = 6;

/** What is judged by what: documents, the setup of each recording, and assessments made from the store. */
export class Book {
  readonly #store: Store;
  readonly #tables = new Map<string, ProfileTable>();
  /** Counts up whenever tables become stale: one that was begun before is not kept. */
  #generation = 0;

  constructor(store: Store) {
    this.#store = store;
  }

  async documents(): Promise<Documents> {
    const own = async <T>(kind: 'limit-set' | 'vehicle' | 'register', parse: (body: unknown) => T) =>
      (await this.#store.documents.list(kind)).map(parse);
    return {
      limitSets: [...BUILT_IN.limitSets, ...(await own('limit-set', (body) => LimitSet.parse(body)))],
      vehicles: [...BUILT_IN.vehicles, ...(await own('vehicle', (body) => Vehicle.parse(body)))],
      registers: await own('register', (body) => CantRegister.parse(body)),
    };
  }

  /** The setup that a new recording gets: the last one chosen for the mode in use. */
  async defaultSetup(): Promise<SetupRef> {
    const mode = (await this.#store.documents.setting('mode')) === 'road' ? 'road' : 'rail';
    return await this.#setupOfMode(mode);
  }

  async #setupOfMode(mode: Mode): Promise<SetupRef> {
    const kept = SetupRef.safeParse(await this.#store.documents.setting(`setup:${mode}`));
    return await this.#withKnownIds(kept.success ? kept.data : DEFAULT_SETUP[mode]);
  }

  /** The setup in effect for a recording: its own, else the one kept for its mode. */
  async setupOf(recordingId: string): Promise<SetupRef> {
    const { setup, mode } = await this.#store.recordingSetup(recordingId);
    const own = SetupRef.safeParse(setup);
    if (own.success) return await this.#withKnownIds(own.data);
    return mode === null ? await this.defaultSetup() : await this.#setupOfMode(mode);
  }

  /**
   * Keeps a setup: for one recording (all its runs), or for all of its mode. The latter replaces what
   * single recordings of that mode had, so that the change shows wherever the user looks.
   */
  async putSetup(ref: SetupRef, recordingId: string | null): Promise<void> {
    resolveSetup(ref, await this.documents());
    this.forgetTables();
    if (recordingId !== null) {
      await this.#store.setRecordingSetup(recordingId, ref);
      return;
    }
    await this.#store.documents.putSetting('mode', ref.mode);
    await this.#store.documents.putSetting(`setup:${ref.mode}`, ref);
    for (const { id } of await this.#store.recordings()) {
      const own = SetupRef.safeParse((await this.#store.recordingSetup(id)).setup);
      if (own.success && own.data.mode === ref.mode) await this.#store.setRecordingSetup(id, null);
    }
  }

  /** A set, vehicle or register that was deleted since is replaced by what a new user gets. */
  async #withKnownIds(ref: SetupRef): Promise<SetupRef> {
    const documents = await this.documents();
    const fallback = DEFAULT_SETUP[ref.mode];
    const known = (items: readonly { readonly id: string }[], id: string) => items.some((item) => item.id === id);
    return {
      ...ref,
      limitSetId: known(documents.limitSets, ref.limitSetId) ? ref.limitSetId : fallback.limitSetId,
      vehicleId: known(documents.vehicles, ref.vehicleId) ? ref.vehicleId : fallback.vehicleId,
      registerId: ref.registerId !== null && known(documents.registers, ref.registerId) ? ref.registerId : null,
    };
  }

  async run(id: string): Promise<StoredRun> {
    const run = await this.#store.run(id);
    if (run === null) throw notFound(`Run ${id}`);
    return run;
  }

  async setupFor(run: StoredRun): Promise<{ ref: SetupRef; setup: Setup }> {
    const ref = await this.setupOf(run.summary.recordingId);
    return { ref, setup: resolveSetup(ref, await this.documents()) };
  }

  async resolve(ref: SetupRef): Promise<Setup> {
    return resolveSetup(ref, await this.documents());
  }

  /** Documents or runs changed: tables made from them are stale. */
  forgetTables(): void {
    this.#generation++;
    this.#tables.clear();
  }

  async table(runId: string): Promise<ProfileTable> {
    const ready = this.#tables.get(runId);
    if (ready !== undefined) return ready;
    const generation = this.#generation;
    const run = await this.run(runId);
    const { setup } = await this.setupFor(run);
    const table = profileTable({ profile: await this.#store.profile(runId), passages: run.passages }, setup);
    if (generation !== this.#generation) return table;
    if (this.#tables.size >= READY_TABLES) this.#tables.delete(this.#tables.keys().next().value!);
    this.#tables.set(runId, table);
    return table;
  }

  /** Context of the exports of one run. */
  async report(runId: string): Promise<ReportContext> {
    const stored = await this.run(runId);
    const recording = (await this.#store.recording(stored.summary.recordingId))!;
    const { setup } = await this.setupFor(stored);
    const { summary } = stored;
    const run: AssessableRun = {
      id: summary.id,
      name: summary.name,
      startUtcS: summary.startUtcS,
      durationS: summary.durationS,
      fixCount: summary.fixCount,
      topSpeedKmh: summary.topSpeedKmh,
      recording: { name: recording.name, sha256: recording.sha256, bytes: recording.bytes },
      alignment: stored.alignment,
      passages: stored.passages,
      profile: await this.#store.profile(runId),
      findings: [...recording.findings, ...stored.findings] as AssessableRun['findings'],
    };
    return reportContext(summary.name, [run], setup);
  }
}
