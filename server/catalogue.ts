import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { BendbookError } from '../shared/model/fault.ts';
import { parseLimitSet, parseVehicle } from '../shared/limits/index.ts';
import type { CantRegister } from '../shared/schema/cant-register.ts';
import type { Mode } from '../shared/schema/common.ts';
import type { LimitSet } from '../shared/schema/limit-set.ts';
import type { Setup, SetupRef } from '../shared/schema/setup.ts';
import type { Vehicle } from '../shared/schema/vehicle.ts';
import { PACKAGE_ROOT } from './package-root.ts';

/** Limit sets and vehicles that come with the program. */
export const BUILT_IN = {
  limitSets: readFolder('limits', parseLimitSet),
  vehicles: readFolder('vehicles', parseVehicle),
};

/** What a run is judged by until somebody chooses: the first step of every new user. */
export const DEFAULT_SETUP: Readonly<Record<Mode, SetupRef>> = {
  rail: {
    mode: 'rail',
    limitSetId: 'conventional-train',
    vehicleId: 'coach-conventional',
    registerId: null,
    cantRule: { kind: 'unknown' },
    tier: 'normal',
    confidence: 0.95,
  },
  road: {
    mode: 'road',
    limitSetId: 'bus-coach-standing',
    vehicleId: 'bus-city',
    registerId: null,
    cantRule: { kind: 'constant', value: 0 },
    tier: 'normal',
    confidence: 0.95,
  },
};

/** Where sets, vehicles and registers are looked up by id: shipped ones and the user's own. */
export interface Documents {
  readonly limitSets: readonly LimitSet[];
  readonly vehicles: readonly Vehicle[];
  readonly registers: readonly CantRegister[];
}

/**
 * A setup by reference made whole.
 *
 * @throws BendbookError `setup/unknown-*` when an id is not known; `setup/mode` when a set or vehicle is for the other mode.
 */
export function resolveSetup(ref: SetupRef, documents: Documents): Setup {
  const limits = find(documents.limitSets, ref.limitSetId, 'limit set');
  const vehicle = find(documents.vehicles, ref.vehicleId, 'vehicle');
  const register = ref.registerId === null ? null : find(documents.registers, ref.registerId, 'cant register');
  for (const [what, item] of [
    ['limit set', limits],
    ['vehicle', vehicle],
  ] as const) {
    if (item.mode === ref.mode) continue;
    throw new BendbookError('setup/mode', {
      cause: `the ${what} "${item.name}" is for ${item.mode}, the setup for ${ref.mode}`,
      remedy: `Choose a ${what} for ${ref.mode}`,
    });
  }
  const { mode, cantRule, tier, confidence } = ref;
  return { mode, limits, vehicle, register, cantRule, tier, confidence };
}

function find<T extends { readonly id: string }>(items: readonly T[], id: string, what: string): T {
  const found = items.find((item) => item.id === id);
  if (found !== undefined) return found;
  throw new BendbookError(`setup/unknown-${what.replace(' ', '-')}`, {
    cause: `there is no ${what} "${id}"`,
    remedy: items.length === 0 ? `Add a ${what} first` : `Choose one of: ${items.map((item) => item.id).join(', ')}`,
  });
}

function readFolder<T>(folder: string, parse: (text: string, file: string) => T): T[] {
  const path = join(PACKAGE_ROOT, 'data', folder);
  return readdirSync(path)
    .filter((name) => name.endsWith('.json'))
    .sort()
    .map((name) => parse(readFileSync(join(path, name), 'utf8'), name));
}
