import { useEffect, useRef } from 'preact/hooks';
import { figure } from '../parts/text.ts';
import { RAMPS, rampColours, type Ramp } from '../ramp/ramp.ts';
import { app, type Quantity } from '../state/app-state.ts';

/** Above the map: the quantity that colours the run, its scale, and what can be done with the map. */
export function PlanHead(props: {
  readonly mode: 'rail' | 'road';
  readonly ramp: Ramp;
  readonly domain: readonly [number, number];
  readonly onWhole: () => void;
  readonly children: preact.ComponentChildren;
}) {
  const { mode, ramp, domain, onWhole, children } = props;
  return (
    <div class="view-head">
      <label>
        <span class="sr">Colour by</span>
        <select
          class="ramp-choice"
          value={ramp.quantity}
          onChange={(e) => app.set({ quantity: e.currentTarget.value as Quantity })}
        >
          {RAMPS.filter((r) => mode === 'rail' || r.quantity !== 'deficiency').map((r) => (
            <option key={r.quantity} value={r.quantity}>
              {r.label}
            </option>
          ))}
        </select>
      </label>
      <Scale ramp={ramp} domain={domain} />
      <span class="grow" />
      <button type="button" onClick={onWhole}>
        Whole run
      </button>
      {children}
    </div>
  );
}

function Scale({ ramp, domain: [low, high] }: { readonly ramp: Ramp; readonly domain: readonly [number, number] }) {
  const canvas = useRef<HTMLCanvasElement>(null);
  const colours = rampColours(ramp);
  useEffect(() => {
    const { width, height } = canvas.current!;
    const context = canvas.current!.getContext('2d')!;
    colours.forEach((colour, k) => {
      context.fillStyle = colour;
      context.fillRect((k * width) / colours.length, 0, width / colours.length + 1, height);
    });
  }, [colours.join()]);
  return (
    <span class="ramp-scale">
      {figure(low, ramp.decimals)}
      <canvas ref={canvas} width={140} height={10} aria-hidden="true" />
      {figure(high, ramp.decimals)} <span class="quiet-text">{ramp.unit}</span>
    </span>
  );
}
