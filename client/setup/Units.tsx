import { figure, quantity } from '../parts/text.ts';
import { IMPERIAL_UNITS, SI_UNITS, UNIT_CHOICES, type ShownQuantity } from '../parts/units.ts';
import type { Unit } from '../../shared/units.ts';
import { app } from '../state/app-state.ts';
import { useSlice } from '../state/observable.ts';

const QUANTITIES = Object.keys(UNIT_CHOICES) as ShownQuantity[];

/** Example figure of each quantity in the unit that everything is computed in. */
const EXAMPLES: Readonly<Record<ShownQuantity, readonly [value: number, unit: string, decimals: number]>> = {
  speed: [80, 'km/h', 1],
  chainage: [12_345, 'm', 1],
  length: [412, 'm', 0],
  cant: [110, 'mm', 0],
  acceleration: [0.85, 'm/s²', 3],
  jerk: [0.4, 'm/s³', 3],
};

/** In which unit each quantity is shown, and how numbers are written. */
export function Units() {
  const units = useSlice(app, (s) => s.units);
  const decimalSign = useSlice(app, (s) => s.decimalSign);
  return (
    <div class="column narrow">
      <header class="page-head">
        <div>
          <h1>Units and numbers</h1>
          <p class="quiet-text">
            For reading on this page, kept in this browser. Limit sets, registers, the working of a criterion and
            everything exported keep their SI units, so that figures can be compared and checked.
          </p>
        </div>
      </header>
      <section class="card" aria-label="Units">
        <div class="row">
          <h2 class="grow">Units</h2>
          <button type="button" onClick={() => app.set({ units: SI_UNITS })}>
            All SI
          </button>
          <button type="button" onClick={() => app.set({ units: IMPERIAL_UNITS })}>
            All imperial
          </button>
        </div>
        <div class="fields">
          {QUANTITIES.map((name) => {
            const [value, unit, decimals] = EXAMPLES[name];
            return (
              <label key={name}>
                <span>{UNIT_CHOICES[name].label}</span>
                <span class="field">
                  <select
                    value={units[name]}
                    onChange={(e) => app.set({ units: { ...units, [name]: e.currentTarget.value as Unit } })}
                  >
                    {UNIT_CHOICES[name].units.map((choice) => (
                      <option key={choice} value={choice}>
                        {choice}
                      </option>
                    ))}
                  </select>
                  <span class="unit wide-unit">{quantity(value, unit, decimals, units, name === 'chainage')}</span>
                </span>
              </label>
            );
          })}
        </div>
      </section>
      <section class="card" aria-label="Numbers">
        <h2>Numbers</h2>
        <p>
          On the page numbers look the same in every language: a point before the decimals, a thin gap between
          thousands, as in {figure(12345.6, 1)}.
        </p>
        <div class="fields">
          <label>
            <span>
              Decimal sign in copied tables <small>what your spreadsheet takes for a number</small>
            </span>
            <select
              value={decimalSign}
              onChange={(e) => app.set({ decimalSign: e.currentTarget.value === ',' ? ',' : '.' })}
            >
              <option value=".">point, 12345.6</option>
              <option value=",">comma, 12345,6</option>
            </select>
          </label>
        </div>
      </section>
    </div>
  );
}
