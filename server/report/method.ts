import type { ReportContext } from './context.ts';

/** Cautions, inputs, setup and method as lines of text: what a reader needs to reproduce and to doubt a figure. */
export function methodLines(context: ReportContext): string[] {
  const { setup } = context;
  return [
    context.title,
    '',
    'CAUTIONS',
    ...context.cautions,
    '',
    'RECORDINGS',
    ...context.runs.map(
      ({ name, recording, lengthM, startUtcS }) =>
        `${name}: ${recording.name}, ${String(recording.bytes)} bytes, SHA-256 ${recording.sha256}; ` +
        `${(lengthM / 1000).toFixed(3)} km, begins ${utcText(startUtcS)}`,
    ),
    '',
    'SETUP',
    `Mode: ${setup.mode}`,
    `Limit set: ${setup.limits.name} (${setup.limits.appliesTo}); tier: ${setup.tier}`,
    `Vehicle: ${setup.vehicle.name}`,
    `Cant: ${setup.register === null ? 'no register' : `register "${setup.register.name}"`}; elsewhere ${cantRuleText(context)}`,
    `Confidence of intervals: ${String(setup.confidence * 100)} %`,
    '',
    'SOURCES OF LIMITS',
    ...setup.limits.limits.map(
      ({ criterion, source }) =>
        `${criterion}: ${source.document}${source.clause === '' ? '' : `, ${source.clause}`}` +
        `${source.year === null ? '' : `, ${String(source.year)}`} (${source.status})`,
    ),
    '',
    'METHOD AND UNCERTAINTY',
    ...METHOD,
    '',
    `Made with ${context.software}`,
  ];
}

const METHOD: readonly string[] = [
  'Fixes are cleaned (order, repeats, jumps, standstill); what was dropped is counted in the findings.',
  'A fixed-interval smoother with a motion model estimates position, course, speed and curvature; noise levels are estimated from the log itself, and Doppler course and speed are used where the log has them.',
  'Straights, transitions and circular arcs are then fitted to the fixes themselves by least squares, with the slowly wandering error of the receiver modelled; standard errors come from the full information matrix.',
  'Intervals are two-sided at the stated confidence. A verdict is "undecided" when the interval straddles the limit and "not assessed" when an input is missing.',
  'Track-plane lateral acceleration: a_q = v²/R cos θ − g sin θ with sin θ = D/b. Cant deficiency: I = b v²/(g R) − D. Side friction demand: f = (v²/(gR) − e)/(1 + e v²/(gR)). g = 9.80665 m/s².',
  'Lateral acceleration is uncertain through radius and speed together; the error of the speed scale enters once.',
];

export function utcText(utcS: number): string {
  return Number.isFinite(utcS)
    ? `${new Date(utcS * 1000).toISOString().slice(0, 19).replace('T', ' ')} UTC`
    : 'at an unknown time';
}

function cantRuleText({ setup }: ReportContext): string {
  const rule = setup.cantRule;
  if (rule.kind === 'unknown') return 'unknown';
  if (rule.kind === 'constant') return `assumed ${String(rule.value)} ${setup.mode === 'rail' ? 'mm' : '%'}`;
  return `assumed ${String(rule.share * 100)} % of equilibrium cant at ${String(rule.speedKmh)} km/h, at most ${String(rule.capMm)} mm`;
}
