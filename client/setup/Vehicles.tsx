import { useState } from 'preact/hooks';
import type { Vehicle } from '../../shared/schema/vehicle.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.ts';
import { saveText } from '../parts/save.ts';
import { app, refreshCatalogue, report } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

type NumberField = { [K in keyof Vehicle]: Vehicle[K] extends number | null ? K : never }[keyof Vehicle];

const FIELDS: readonly (readonly [key: NumberField, label: string, unit: string, modes: readonly string[]])[] = [
  ['gaugeMm', 'Gauge', 'mm', ['rail']],
  ['cantBaseMm', 'Cant base (wheel contact circles)', 'mm', ['rail']],
  ['massKg', 'Mass', 'kg', ['rail', 'road']],
  ['centreOfGravityHeightM', 'Height of the centre of gravity', 'm', ['rail', 'road']],
  ['trackWidthM', 'Track width', 'm', ['road']],
  ['wheelbaseM', 'Wheelbase or bogie centres', 'm', ['rail', 'road']],
  ['rollCoefficient', 'Roll coefficient', '', ['rail', 'road']],
  ['rollFrequencyHz', 'Natural frequency of roll', 'Hz', ['rail', 'road']],
  ['dampingRatio', 'Damping ratio', '', ['rail', 'road']],
  ['tiltCompensation', 'Tilt compensation, share', '', ['rail']],
  ['accelerationMps2', 'Acceleration', 'm/s²', ['rail', 'road']],
  ['brakingMps2', 'Service braking', 'm/s²', ['rail', 'road']],
];

/** Vehicles: presets as starting points, copies to change. An empty field means unknown: what needs it is not assessed. */
export function Vehicles() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const [chosen, setChosen] = useState<string | null>(null);
  if (catalogue === null) return <main class="page" />;
  const vehicles = catalogue.vehicles;
  const vehicle = vehicles.find(({ id }) => id === chosen) ?? vehicles[0]!;
  const copy = async () => {
    const id = `own-${crypto.randomUUID().slice(0, 8)}`;
    const { builtIn: _builtIn, ...rest } = vehicle;
    await api.putVehicle({
      ...rest,
      id,
      name: `${vehicle.name}, our copy`,
      source: { document: 'operator', clause: '', year: null, status: 'operator' },
    });
    await refreshCatalogue();
    setChosen(id);
  };
  return (
    <main class="page">
      <div class="column">
        <h1>Vehicles</h1>
        <p>
          An empty field is unknown: criteria that need it are then not assessed. Presets are generic; copy one and put
          in the figures of your vehicle.
        </p>
        <section class="card">
          <div class="row">
            <label class="grow">
              <span class="sr">Vehicle</span>
              <select value={vehicle.id} onChange={(e) => setChosen(e.currentTarget.value)}>
                {vehicles.map((v) => (
                  <option key={v.id} value={v.id}>
                    {v.name} ({v.mode}
                    {v.builtIn ? '' : ', own'})
                  </option>
                ))}
              </select>
            </label>
            <button type="button" onClick={() => void copy().catch(report)}>
              Copy
            </button>
            <button
              type="button"
              onClick={() => saveText(`${vehicle.id}.json`, JSON.stringify(vehicle, null, 2), 'application/json')}
            >
              Export
            </button>
            {!vehicle.builtIn && (
              <button
                type="button"
                onClick={() => {
                  if (confirmAction(`Delete "${vehicle.name}"?`))
                    void api.removeVehicle(vehicle.id).then(refreshCatalogue).catch(report);
                }}
              >
                Delete
              </button>
            )}
          </div>
          <VehicleForm key={vehicle.id} vehicle={vehicle} editable={!vehicle.builtIn} />
          <p class="quiet-text">
            Source: {vehicle.source.document} ({vehicle.source.status}). {vehicle.source.note}
          </p>
        </section>
      </div>
    </main>
  );
}

function VehicleForm({ vehicle, editable }: { readonly vehicle: Vehicle; readonly editable: boolean }) {
  const [draft, setDraft] = useState(vehicle);
  return (
    <form
      class="card"
      onSubmit={(e) => {
        e.preventDefault();
        void api.putVehicle(draft).then(refreshCatalogue).catch(report);
      }}
    >
      {editable && (
        <label class="row">
          <span class="grow">Name</span>
          <input type="text" value={draft.name} onInput={(e) => setDraft({ ...draft, name: e.currentTarget.value })} />
        </label>
      )}
      {FIELDS.filter(([, , , modes]) => modes.includes(vehicle.mode)).map(([key, label, unit]) => (
        <label class="row" key={key}>
          <span class="grow">
            {label} <span class="quiet-text">{unit}</span>
          </span>
          <input
            type="text"
            inputMode="decimal"
            class="num"
            size={10}
            readOnly={!editable}
            defaultValue={draft[key]?.toString() ?? ''}
            onChange={(e) => {
              const text = e.currentTarget.value.trim();
              const value = text === '' ? null : Number(text);
              if (value === null || Number.isFinite(value)) setDraft({ ...draft, [key]: value });
            }}
          />
        </label>
      ))}
      <label class="row">
        <span class="grow">Passengers</span>
        <select
          disabled={!editable}
          value={draft.passengers}
          onChange={(e) => setDraft({ ...draft, passengers: e.currentTarget.value as Vehicle['passengers'] })}
        >
          <option value="seated">seated</option>
          <option value="standing">standing</option>
        </select>
      </label>
      {editable && (
        <div class="row">
          <button type="submit" class="primary" disabled={draft === vehicle}>
            Save changes
          </button>
        </div>
      )}
    </form>
  );
}
