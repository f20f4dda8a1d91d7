import { assessRun, passagesFromWire } from '../../shared/assess/index.ts';
import type { Finding } from '../../shared/model/finding.ts';
import type { RunPassages } from '../../shared/model/passage.ts';
import type { Catalogue, RunDetail } from '../../shared/schema/api.ts';
import type { Setup, SetupRef } from '../../shared/schema/setup.ts';
import { api, ApiError } from '../api.ts';
import { app, report, type OpenRun } from './app-state.ts';

let edition = 0;

/** Opens a run: its geometry and passages once, its assessment at once and after every change of setup. */
export async function openRun(
  runId: string,
  keep: { curve?: number | null; windowM?: readonly [number, number] | null } = {},
): Promise<void> {
  const same = app.get().runId === runId && app.get().open !== null;
  app.set({ runId, curve: keep.curve ?? null, windowM: keep.windowM ?? null, ...(same ? {} : { open: null }) });
  try {
    const detail = await api.run(runId);
    const catalogue = app.get().catalogue ?? (await api.catalogue());
    if (app.get().runId !== runId) return;
    app.set({ catalogue, open: assess(detail, passagesFromWire(detail.passages), detail.setup, catalogue) });
  } catch (error) {
    if (error instanceof ApiError && error.fault.code === 'http/not-found') {
      app.set({ runId: null, open: null, curve: null, windowM: null });
    }
    report(error);
  }
}

function assess(detail: RunDetail, passages: RunPassages, ref: SetupRef, catalogue: Catalogue): OpenRun {
  const setup = resolveSetup(ref, catalogue);
  const { curves, findings, cautions } = assessRun(passages, setup, { working: false });
  edition++;
  return {
    detail,
    passages,
    ref,
    setup,
    curves,
    findings: [...(detail.findings as Finding[]), ...findings],
    cautions,
    edition,
  };
}

/** A setup by reference made whole from the catalogue; ids that are gone fall back to the first of their mode. */
export function resolveSetup(ref: SetupRef, catalogue: Catalogue): Setup {
  const pick = <T extends { id: string; mode: string }>(items: readonly T[], wanted: string): T =>
    items.find((item) => item.id === wanted && item.mode === ref.mode) ?? items.find((item) => item.mode === ref.mode)!;
  return {
    mode: ref.mode,
    limits: pick(catalogue.limitSets, ref.limitSetId),
    vehicle: pick(catalogue.vehicles, ref.vehicleId),
    register: catalogue.registers.find(({ id }) => id === ref.registerId) ?? null,
    cantRule: ref.cantRule,
    tier: ref.tier,
    confidence: ref.confidence,
    ...(ref.permittedSpeeds === undefined ? {} : { permittedSpeeds: ref.permittedSpeeds }),
    ...(ref.irregularitiesM === undefined ? {} : { irregularitiesM: ref.irregularitiesM }),
  };
}

/** Changes the setup of the open run: verdicts change here at once, the server keeps it and draws its columns by it. */
export async function changeSetup(change: Partial<SetupRef>): Promise<void> {
  const { open, catalogue, runId } = app.get();
  if (open === null || catalogue === null || runId === null) return;
  const wanted = { ...open.ref, ...change };
  const setup = resolveSetup(wanted, catalogue);
  const ref: SetupRef = {
    ...wanted,
    limitSetId: setup.limits.id,
    vehicleId: setup.vehicle.id,
    registerId: setup.register?.id ?? null,
  };
  app.set({ open: assess(open.detail, open.passages, ref, catalogue) });
  try {
    await api.putSetup(ref, runId);
    const now = app.get().open;
    if (now !== null && app.get().runId === runId) {
      edition++;
      app.set({ open: { ...now, edition } });
    }
  } catch (error) {
    report(error);
  }
}

/** Limit sets, vehicles or registers changed: read them again and judge the open run by them. */
export async function refreshCatalogue(): Promise<void> {
  try {
    const catalogue = await api.catalogue();
    const { open } = app.get();
    app.set({ catalogue, ...(open === null ? {} : { open: assess(open.detail, open.passages, open.ref, catalogue) }) });
  } catch (error) {
    report(error);
  }
}
