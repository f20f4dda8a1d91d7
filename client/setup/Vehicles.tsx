import { useState } from 'preact/hooks';
import { BendbookError } from '../../shared/model/fault.ts';
import type { Vehicle } from '../../shared/schema/vehicle.ts';
import { api } from '../api.ts';
import { confirmAction } from '../parts/confirm.tsx';
import { saveText } from '../parts/save.ts';
import { app, notify, report, showFault } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';
import { changeSetup, refreshCatalogue } from '../state/open-run.ts';
import { Chooser } from './Chooser.tsx';
import { VehicleForm } from './VehicleForm.tsx';

type Listed = Vehicle & { readonly builtIn: boolean };

/** Vehicles: presets as starting points, copies to change. An empty field means unknown: what needs it is not assessed. */
export function Vehicles() {
  const catalogue = useSlice(app, (s) => s.catalogue);
  const open = useSlice(app, (s) => s.open);
  const [chosen, setChosen] = useState<string | null>(open?.setup.vehicle.id ?? null);
  if (catalogue === null) return null;
  const vehicles = catalogue.vehicles;
  const vehicle = vehicles.find(({ id }) => id === chosen) ?? vehicles[0]!;
  return (
    <div class="column">
      <header class="page-head">
        <div>
          <h1>Vehicles</h1>
          <p class="quiet-text">
            An empty field is unknown, and what needs it is not assessed. The presets are generic: copy one and put in
            the figures of your vehicle.
          </p>
        </div>
        <label class="button">
          Import a vehicle
          <input
            class="sr"
            type="file"
            accept=".json"
            onChange={(e) => {
              void importVehicle(e.currentTarget.files?.[0], vehicles).then((id) => {
                if (id !== null) setChosen(id);
              });
              e.currentTarget.value = '';
            }}
          />
        </label>
      </header>
      <div class="with-chooser">
        <Chooser label="Vehicles" items={vehicles} chosen={vehicle.id} onChoose={setChosen} />
        <section class="card" aria-labelledby="vehicle-name">
          <div class="row">
            <h2 id="vehicle-name" class="grow">
              {vehicle.name}
            </h2>
            {open?.ref.mode === vehicle.mode && open.setup.vehicle.id !== vehicle.id && (
              <button
                type="button"
                onClick={() =>
                  void changeSetup({ vehicleId: vehicle.id }).then(() =>
                    notify('The open run is judged with this vehicle'),
                  )
                }
              >
                Use it for the open run
              </button>
            )}
            <button type="button" onClick={() => void copyVehicle(vehicle).then(setChosen).catch(report)}>
              Copy
            </button>
            <button
              type="button"
              onClick={() =>
                saveText(`${vehicle.id}.json`, JSON.stringify(withoutMark(vehicle), null, 2), 'application/json')
              }
            >
              Export
            </button>
            {!vehicle.builtIn && (
              <button type="button" onClick={() => void deleteVehicle(vehicle)}>
                Delete
              </button>
            )}
          </div>
          <VehicleForm key={JSON.stringify(vehicle)} vehicle={withoutMark(vehicle)} editable={!vehicle.builtIn} />
          <p class="quiet-text">
            Source: {vehicle.source.document}
            {vehicle.source.status === vehicle.source.document ? '' : ` (${vehicle.source.status})`}.{' '}
            {vehicle.source.note?.replace(/\.?$/, '.')}
          </p>
        </section>
      </div>
    </div>
  );
}

function withoutMark(vehicle: Listed): Vehicle {
  const plain: Vehicle & { builtIn?: boolean } = { ...vehicle };
  delete plain.builtIn;
  return plain;
}

async function copyVehicle(vehicle: Listed): Promise<string> {
  const id = `own-${crypto.randomUUID().slice(0, 8)}`;
  await api.putVehicle({
    ...withoutMark(vehicle),
    id,
    name: `${vehicle.name}, our copy`,
    source: { document: 'operator', clause: '', year: null, status: 'operator' },
  });
  await refreshCatalogue();
  return id;
}

async function deleteVehicle(vehicle: Listed): Promise<void> {
  if (!(await confirmAction(`Delete the vehicle “${vehicle.name}”? This cannot be undone.`, 'Delete it'))) return;
  try {
    await api.removeVehicle(vehicle.id);
    await refreshCatalogue();
    notify(`“${vehicle.name}” is deleted`);
  } catch (error) {
    report(error);
  }
}

async function importVehicle(file: File | undefined, vehicles: readonly Listed[]): Promise<string | null> {
  if (file === undefined) return null;
  try {
    const { parseVehicle } = await import('../../shared/limits/parse.ts');
    const read = parseVehicle(await file.text(), file.name);
    const isTaken = vehicles.some(({ id, builtIn }) => builtIn && id === read.id);
    const kept = isTaken ? { ...read, id: `${read.id}-imported` } : read;
    await api.putVehicle(kept);
    await refreshCatalogue();
    notify(`“${kept.name}” is imported`);
    return kept.id;
  } catch (error) {
    if (error instanceof BendbookError) showFault({ ...error.fault, place: { ...error.fault.place } });
    else report(error);
    return null;
  }
}
