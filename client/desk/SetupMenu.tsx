import type { CantRule, SetupRef } from '../../shared/schema/setup.ts';
import { app, type OpenRun } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { changeSetup } from '../state/open-run.ts';

const SHARE_RULE: CantRule = { kind: 'share', share: 0.66, speedKmh: 100, capMm: 160 };

/** Mode, limits, vehicle, cant: whatever a verdict depends on besides the run. Every change judges anew at once. */
export function SetupMenu({ open }: { readonly open: OpenRun }) {
  const catalogue = useSlice(app, (s) => s.catalogue);
  if (catalogue === null) return null;
  const { ref } = open;
  const rail = ref.mode === 'rail';
  const set = (change: Partial<SetupRef>) => void changeSetup(change);
  const kept = ref.cantRule;
  const rule = (kind: string): CantRule =>
    kind === 'constant' ? { kind, value: 0 } : kind === 'share' ? SHARE_RULE : { kind: 'unknown' };
  return (
    <details class="menu">
      <summary>
        <span class="ellipsis">
          Limits: {open.setup.limits.name}
          {ref.tier === 'exceptional' ? ', exceptional' : ''}
        </span>
      </summary>
      <div class="wide-menu form">
        <h2>Judged by</h2>
        <label>
          <span>Mode</span>
          <select
            value={ref.mode}
            onChange={(e) =>
              set({
                mode: e.currentTarget.value as SetupRef['mode'],
                registerId: null,
                cantRule: e.currentTarget.value === 'road' ? { kind: 'constant', value: 0 } : { kind: 'unknown' },
              })
            }
          >
            <option value="rail">rail: cant, cant deficiency</option>
            <option value="road">road: superelevation, side friction</option>
          </select>
        </label>
        <label>
          <span>Limit set</span>
          <select value={open.setup.limits.id} onChange={(e) => set({ limitSetId: e.currentTarget.value })}>
            {catalogue.limitSets
              .filter(({ mode }) => mode === ref.mode)
              .map(({ id, name }) => (
                <option key={id} value={id}>
                  {name}
                </option>
              ))}
          </select>
        </label>
        <label>
          <span>Values</span>
          <select value={ref.tier} onChange={(e) => set({ tier: e.currentTarget.value as SetupRef['tier'] })}>
            <option value="normal">normal</option>
            <option value="exceptional">exceptional</option>
          </select>
        </label>
        <label>
          <span>Vehicle</span>
          <select value={open.setup.vehicle.id} onChange={(e) => set({ vehicleId: e.currentTarget.value })}>
            {catalogue.vehicles
              .filter(({ mode }) => mode === ref.mode)
              .map(({ id, name }) => (
                <option key={id} value={id}>
                  {name}
                </option>
              ))}
          </select>
        </label>
        <label>
          <span>{rail ? 'Cant register' : 'Register'}</span>
          <select
            value={ref.registerId ?? ''}
            onChange={(e) => set({ registerId: e.currentTarget.value === '' ? null : e.currentTarget.value })}
          >
            <option value="">none</option>
            {catalogue.registers.map(({ id, name }) => (
              <option key={id} value={id}>
                {name}
              </option>
            ))}
          </select>
        </label>
        <label>
          <span>{rail ? 'Cant where it is silent' : 'Superelevation where it is silent'}</span>
          <select value={kept.kind} onChange={(e) => set({ cantRule: rule(e.currentTarget.value) })}>
            <option value="unknown">unknown</option>
            <option value="constant">assume one value</option>
            {rail && <option value="share">assume a share of equilibrium cant</option>}
          </select>
        </label>
        {kept.kind === 'constant' && (
          <Value
            label={`Assumed, ${rail ? 'mm' : '%'}`}
            value={kept.value}
            onValue={(value) => set({ cantRule: { ...kept, value } })}
          />
        )}
        {kept.kind === 'share' && (
          <>
            <Value
              label="Share of equilibrium, %"
              value={Math.round(100 * kept.share)}
              onValue={(v) => set({ cantRule: { ...kept, share: Math.min(1, Math.max(0, v / 100)) } })}
            />
            <Value
              label="At, km/h"
              value={kept.speedKmh}
              onValue={(speedKmh) => {
                if (speedKmh > 0) set({ cantRule: { ...kept, speedKmh } });
              }}
            />
            <Value
              label="At most, mm"
              value={kept.capMm}
              onValue={(capMm) => {
                if (capMm > 0) set({ cantRule: { ...kept, capMm } });
              }}
            />
          </>
        )}
        <label>
          <span>Confidence of intervals</span>
          <select value={String(ref.confidence)} onChange={(e) => set({ confidence: Number(e.currentTarget.value) })}>
            {[...new Set([0.8, 0.9, 0.95, 0.99, ref.confidence])].sort().map((c) => (
              <option key={c} value={String(c)}>
                {Math.round(c * 1000) / 10} %
              </option>
            ))}
          </select>
        </label>
        <p class="quiet-text">{open.setup.limits.appliesTo}</p>
      </div>
    </details>
  );
}

function Value(props: { readonly label: string; readonly value: number; readonly onValue: (value: number) => void }) {
  const { label, value, onValue } = props;
  return (
    <label>
      <span>{label}</span>
      <input
        type="number"
        class="num"
        value={value}
        onChange={(e) => {
          const next = e.currentTarget.valueAsNumber;
          if (Number.isFinite(next)) onValue(next);
        }}
      />
    </label>
  );
}
