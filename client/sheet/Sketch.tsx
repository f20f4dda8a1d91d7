import type { Curve } from '../../shared/model/alignment.ts';
import type { Passage } from '../../shared/model/passage.ts';
import { figure } from '../parts/text.ts';

const [WIDTH, HEIGHT] = [340, 190];

/** Plan of the fitted geometry in true proportion with its tangent points, and the speed through it. */
export function Sketch({ curve, passage }: { readonly curve: Curve; readonly passage: Passage }) {
  const points = integrate(curve);
  const xs = points.map(({ x }) => x);
  const ys = points.map(({ y }) => y);
  const [x0, x1, y0, y1] = [Math.min(...xs), Math.max(...xs), Math.min(...ys), Math.max(...ys)];
  const scale = Math.min((WIDTH - 40) / Math.max(1, x1 - x0), (HEIGHT - 60) / Math.max(1, y1 - y0));
  const px = (x: number) => WIDTH / 2 + (x - (x0 + x1) / 2) * scale;
  const py = (y: number) => (HEIGHT - 20) / 2 - (y - (y0 + y1) / 2) * scale;
  const path = points.map(({ x, y }, i) => `${i === 0 ? 'M' : 'L'}${px(x).toFixed(1)} ${py(y).toFixed(1)}`).join('');
  const marks = [
    [curve.startM, 'start'],
    [curve.arcStartM, 'arc'],
    [curve.arcEndM, 'arc'],
    [curve.endM, 'end'],
  ] as const;
  const bar = niceLength(60 / scale);
  return (
    <figure class="sketch">
      <svg
        viewBox={`0 0 ${String(WIDTH)} ${String(HEIGHT)}`}
        role="img"
        aria-label={`Plan of curve ${String(curve.number)}: ${curve.hand}, radius ${figure(curve.radiusM.value, 0)} m`}
      >
        <path d={path} fill="none" stroke="var(--fitted)" stroke-width="2.4" />
        {marks.map(([s, name], k) => {
          const p = points.reduce((best, q) => (Math.abs(q.s - s) < Math.abs(best.s - s) ? q : best));
          return (
            <g key={k}>
              <circle cx={px(p.x)} cy={py(p.y)} r="4" fill="var(--panel)" stroke="var(--ink)" stroke-width="1.5">
                <title>{`${name} at ${figure(s, 0)} m`}</title>
              </circle>
            </g>
          );
        })}
        <path d={`M12 ${String(HEIGHT - 12)}v5h${(bar * scale).toFixed(1)}v-5`} fill="none" stroke="var(--ink-3)" />
        <text x={18 + bar * scale} y={HEIGHT - 6} font-size="11" fill="var(--ink-3)">
          {figure(bar, 0)} m
        </text>
        <Speeds passage={passage} />
      </svg>
    </figure>
  );
}

/** Speed through the curve as a small line at the lower right. */
function Speeds({ passage }: { readonly passage: Passage }) {
  const { chainageM: s, speedMps: v } = passage;
  const [low, high] = [Math.min(...v), Math.max(...v)];
  const span = Math.max(high - low, 0.5);
  const [left, top, width, height] = [WIDTH - 122, HEIGHT - 34, 112, 20];
  const x = (m: number) => left + ((m - s[0]!) / Math.max(1e-6, s[s.length - 1]! - s[0]!)) * width;
  const y = (mps: number) => top + height - ((mps - low) / span) * height;
  return (
    <g>
      <path
        d={s.map((m, i) => `${i === 0 ? 'M' : 'L'}${x(m).toFixed(1)} ${y(v[i]!).toFixed(1)}`).join('')}
        fill="none"
        stroke="var(--ink-2)"
        stroke-width="1.3"
      />
      <text x={left} y={top - 4} font-size="10.5" fill="var(--ink-3)">
        {figure(low * 3.6, 0)} to {figure(high * 3.6, 0)} km/h
      </text>
    </g>
  );
}

/** The fitted centre line from 30 % before the curve to 30 % after it, by small steps of heading. */
function integrate(curve: Curve): { s: number; x: number; y: number }[] {
  const { startM, endM, arcStartM, arcEndM } = curve;
  const kappa = curve.curvaturePerM.value;
  const margin = 0.3 * (endM - startM) + 10;
  const steps = 240;
  const ds = (endM - startM + 2 * margin) / steps;
  const at = (s: number) => {
    if (s < startM) return curve.entry.fromCurvaturePerM;
    if (s < arcStartM) return mix(curve.entry.fromCurvaturePerM, kappa, (s - startM) / (arcStartM - startM));
    if (s <= arcEndM) return kappa;
    if (s < endM) return mix(kappa, curve.exit.fromCurvaturePerM, (s - arcEndM) / (endM - arcEndM));
    return curve.exit.fromCurvaturePerM;
  };
  let [x, y, heading] = [0, 0, 0];
  const points = [{ s: startM - margin, x, y }];
  for (let k = 0; k < steps; k++) {
    const s = startM - margin + (k + 0.5) * ds;
    heading += at(s) * ds;
    x += Math.cos(heading - (at(s) * ds) / 2) * ds;
    y += Math.sin(heading - (at(s) * ds) / 2) * ds;
    points.push({ s: s + ds / 2, x, y });
  }
  // Turned so that the chord lies level.
  const end = points[points.length - 1]!;
  const turn = -Math.atan2(end.y, end.x);
  return points.map((p) => ({
    s: p.s,
    x: p.x * Math.cos(turn) - p.y * Math.sin(turn),
    y: p.x * Math.sin(turn) + p.y * Math.cos(turn),
  }));
}

function mix(a: number, b: number, t: number): number {
  return a + (b - a) * t;
}

function niceLength(raw: number): number {
  const power = 10 ** Math.floor(Math.log10(Math.max(raw, 1e-3)));
  const lead = raw / power;
  return power * (lead >= 5 ? 5 : lead >= 2 ? 2 : 1);
}
