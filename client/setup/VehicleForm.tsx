import type { Vehicle } from '../../shared/schema/vehicle.ts';
import { api } from '../api.ts';
import { notify, report } from '../state/app-state.ts';
import { refreshCatalogue } from '../state/open-run.ts';
import { useDraft } from './use-draft.ts';

type NumberField = Exclude<
  { [K in keyof Vehicle]: Vehicle[K] extends number | null ? K : never }[keyof Vehicle],
  'formatVersion'
>;
type Modes = readonly Vehicle['mode'][];

const BOTH: Modes = ['rail', 'road'];

interface Field {
  readonly key: NumberField;
  readonly label: string;
  readonly unit: string;
  readonly modes: Modes;
  /** What the field is for, so that nobody has to guess whether it matters. */
  readonly use: string;
  readonly isNeeded?: true;
}

const FIELDS: readonly Field[] = [
  { key: 'gaugeMm', label: 'Track gauge', unit: 'mm', modes: ['rail'], use: 'gives the cant base where that is empty' },
  { key: 'cantBaseMm', label: 'Cant base', unit: 'mm', modes: ['rail'], use: 'between the wheel contact circles' },
  { key: 'massKg', label: 'Mass', unit: 'kg', modes: BOTH, use: 'for the record' },
  {
    key: 'centreOfGravityHeightM',
    label: 'Height of the centre of gravity',
    unit: 'm',
    modes: BOTH,
    use: 'margin against overturning, as a caution',
  },
  {
    key: 'trackWidthM',
    label: 'Track width',
    unit: 'm',
    modes: ['road'],
    use: 'margin against overturning, as a caution',
  },
  {
    key: 'wheelbaseM',
    label: 'Wheelbase or bogie centres',
    unit: 'm',
    modes: BOTH,
    use: 'abrupt changes are felt over this length',
  },
  { key: 'rollCoefficient', label: 'Roll coefficient', unit: '', modes: BOTH, use: 'body lateral acceleration' },
  { key: 'rollFrequencyHz', label: 'Natural frequency of roll', unit: 'Hz', modes: BOTH, use: 'dynamic body motion' },
  { key: 'dampingRatio', label: 'Damping ratio of roll', unit: '', modes: BOTH, use: 'dynamic body motion' },
  {
    key: 'tiltCompensation',
    label: 'Share taken away by tilting',
    unit: '0 to 1',
    modes: ['rail'],
    use: 'body lateral acceleration',
    isNeeded: true,
  },
  {
    key: 'accelerationMps2',
    label: 'Acceleration',
    unit: 'm/s²',
    modes: BOTH,
    use: 'cost of slowing down',
    isNeeded: true,
  },
  {
    key: 'brakingMps2',
    label: 'Service braking',
    unit: 'm/s²',
    modes: BOTH,
    use: 'cost of slowing down',
    isNeeded: true,
  },
];

/** The figures of one vehicle; a field left empty is unknown. */
export function VehicleForm({ vehicle, editable }: { readonly vehicle: Vehicle; readonly editable: boolean }) {
  const { draft, isChanged, setDraft, undo } = useDraft(vehicle);
  const save = async () => {
    try {
      await api.putVehicle(draft);
      await refreshCatalogue();
      notify(`“${draft.name}” is saved`);
    } catch (error) {
      report(error);
    }
  };
  return (
    <form
      class="fields"
      onSubmit={(e) => {
        e.preventDefault();
        void save();
      }}
    >
      {editable && (
        <label>
          <span>Name</span>
          <input type="text" value={draft.name} onInput={(e) => setDraft({ ...draft, name: e.currentTarget.value })} />
        </label>
      )}
      {FIELDS.filter(({ modes }) => modes.includes(vehicle.mode)).map(({ key, label, unit, use, isNeeded }) => (
        <label key={key}>
          <span>
            {label} <small>{use}</small>
          </span>
          <span class="field">
            <input
              type="text"
              inputMode="decimal"
              class="num"
              readOnly={!editable}
              placeholder={isNeeded === true ? '' : 'unknown'}
              key={isChanged ? 'draft' : 'kept'}
              defaultValue={draft[key]?.toString() ?? ''}
              onChange={(e) => {
                const text = e.currentTarget.value.trim();
                const value = text === '' ? null : Number(text.replace(',', '.'));
                const isUsable = value === null ? isNeeded !== true : Number.isFinite(value);
                if (isUsable) setDraft({ ...draft, [key]: value });
                else e.currentTarget.value = draft[key]?.toString() ?? '';
              }}
            />
            <span class="unit">{unit}</span>
          </span>
        </label>
      ))}
      <label>
        <span>Passengers</span>
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
        <div class="row end">
          <button type="button" disabled={!isChanged} onClick={undo}>
            Undo
          </button>
          <button type="submit" class="primary" disabled={!isChanged}>
            Save changes
          </button>
        </div>
      )}
    </form>
  );
}
