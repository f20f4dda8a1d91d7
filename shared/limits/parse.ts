import type { z } from 'zod';
import { BendbookError } from '../model/fault.ts';
import { LimitSet } from '../schema/limit-set.ts';
import { Vehicle } from '../schema/vehicle.ts';
import { checkLimitSet } from './check.ts';

/** Value of a JSON text; a fault names the file. */
function readJson(text: string, file: string, code: string): unknown {
  try {
    // A byte order mark, as some editors write, is not part of JSON.
    return JSON.parse(text.replace(/^\uFEFF/, ''));
  } catch (error) {
    const message = error instanceof Error ? error.message : String(error);
    throw new BendbookError(
      code,
      {
        cause: `This is not JSON: ${message}`,
        place: { file },
        remedy: 'Export a set again, or correct the file at the place named.',
      },
      { cause: error },
    );
  }
}

/** Up to five problems of a schema in one sentence: path, then what is wrong. */
function tellIssues(error: z.ZodError): string {
  const told = error.issues.slice(0, 5).map((issue) => {
    const path = issue.path.map(String).join('.');
    return `${path === '' ? 'the file' : path}: ${issue.message}`;
  });
  const rest = error.issues.length - told.length;
  return `${told.join('; ')}${rest > 0 ? `; and ${String(rest)} more` : ''}`;
}

/**
 * A limit set from the text of its file.
 * Errors: BendbookError limits/not-json, limits/not-a-limit-set, limits/contradictory.
 */
export function parseLimitSet(text: string, file = 'limit set'): LimitSet {
  const parsed = LimitSet.safeParse(readJson(text, file, 'limits/not-json'));
  if (!parsed.success) {
    throw new BendbookError('limits/not-a-limit-set', {
      cause: `This is not a limit set of format 1: ${tellIssues(parsed.error)}`,
      place: { file },
      remedy: 'Copy a shipped set and change its values, or correct the fields named.',
    });
  }
  const problems = checkLimitSet(parsed.data).filter((problem) => problem.severity === 'serious');
  if (problems.length > 0) {
    throw new BendbookError('limits/contradictory', {
      cause: `The set contradicts itself: ${problems.map((p) => p.message).join('; ')}`,
      place: { file },
      remedy: 'Correct the criteria named.',
    });
  }
  return parsed.data;
}

/** A vehicle from the text of its file. Errors: BendbookError vehicle/not-json, vehicle/not-a-vehicle. */
export function parseVehicle(text: string, file = 'vehicle'): Vehicle {
  const parsed = Vehicle.safeParse(readJson(text, file, 'vehicle/not-json'));
  if (!parsed.success) {
    throw new BendbookError('vehicle/not-a-vehicle', {
      cause: `This is not a vehicle of format 1: ${tellIssues(parsed.error)}`,
      place: { file },
      remedy: 'Copy a shipped vehicle and change its values, or correct the fields named; null means unknown.',
    });
  }
  return parsed.data;
}
