import type { Fault } from '../shared/model/fault.ts';
import type { Finding } from '../shared/model/finding.ts';

/** Why a recording that was read gave no run: the findings that dropped or split its fixes. */
export function noRunFault(file: string, findings: readonly Pick<Finding, 'severity' | 'message'>[]): Fault {
  const reasons = findings.filter(({ severity }) => severity !== 'info').map(({ message }) => message);
  return {
    code: 'clean/no-run',
    cause: `no run in it could be used${reasons.length > 0 ? ` (${reasons.join('; ')})` : ''}`,
    place: { file },
    remedy: 'A run needs fixes with times along at least some hundred metres',
  };
}
