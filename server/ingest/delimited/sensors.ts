import type { ColumnUse, SensorColumns } from '../../../shared/model/recording.ts';
import { STANDARD_GRAVITY_MPS2 } from '../../../shared/units.ts';
import type { PlannedColumn } from './plan.ts';

const SENSOR_FIELDS = ['accelX', 'accelY', 'accelZ', 'gyroX', 'gyroY', 'gyroZ'] as const;
export type SensorField = (typeof SENSOR_FIELDS)[number];

function isSensorField(field: string): field is SensorField {
  return (SENSOR_FIELDS as readonly string[]).includes(field);
}

/** Above this 99th centile a turn rate is degrees a second: no road or rail vehicle turns at 3.5 rad/s. */
const MOST_TURN_RADPS = 3.5;

/** Growing columns of inertial channels. */
export class SensorBuilder {
  #count = 0;
  #capacity = 1024;
  #utcS = new Float64Array(this.#capacity);
  readonly #columns: { readonly planned: PlannedColumn & { readonly field: SensorField }; values: Float32Array }[];

  constructor(planned: readonly PlannedColumn[]) {
    this.#columns = planned
      .filter((column): column is PlannedColumn & { field: SensorField } => isSensorField(column.field))
      .map((column) => ({ planned: column, values: new Float32Array(this.#capacity) }));
  }

  /** Columns of the file in the order in which `add` takes their values. */
  get columns(): readonly number[] {
    return this.#columns.map(({ planned }) => planned.column);
  }

  /** Appends a row; `values` in the order of `columns`, as written. */
  add(utcS: number, values: Float64Array): void {
    if (this.#count === this.#capacity) {
      this.#capacity = Math.ceil(this.#capacity * 1.5);
      const grown = new Float64Array(this.#capacity);
      grown.set(this.#utcS);
      this.#utcS = grown;
      for (const column of this.#columns) {
        const wider = new Float32Array(this.#capacity);
        wider.set(column.values);
        column.values = wider;
      }
    }
    this.#utcS[this.#count] = utcS;
    this.#columns.forEach((column, i) => (column.values[this.#count] = values[i]!));
    this.#count++;
  }

  /**
   * The channels in m/s² and rad/s. Units the header does not state are judged by size: gravity is
   * about 1 in g and 9.8 in m/s²; turn rates whose 99th centile exceeds 3.5 are degrees a second.
   * `uses` is given the units.
   */
  finish(uses: ColumnUse[]): SensorColumns | null {
    const n = this.#count;
    if (n === 0 || this.#columns.length === 0) return null;
    const accel = this.#columns.filter(({ planned }) => planned.field.startsWith('accel'));
    const gyro = this.#columns.filter(({ planned }) => planned.field.startsWith('gyro'));
    const accelUnit = this.#gravityInG(accel.map(({ values }) => values)) ? 'g' : 'm/s²';
    const gyroUnit = gyro.some(({ values }) => centile99(values, n) > MOST_TURN_RADPS) ? '°/s' : 'rad/s';
    const channels: Partial<Record<SensorField, Float32Array>> = {};
    for (const { planned, values } of this.#columns) {
      const judged = planned.field.startsWith('accel') ? accelUnit : gyroUnit;
      const unit = planned.unit === '' ? judged : planned.unit;
      const guessed = planned.unit === '';
      const factor = guessed ? SENSOR_FACTORS[judged] : planned.factor;
      const column = values.slice(0, n);
      if (factor !== 1) for (let i = 0; i < n; i++) column[i]! *= factor;
      channels[planned.field] = column;
      uses[planned.column] = { ...uses[planned.column]!, field: planned.field, unit, guessed };
    }
    return {
      count: n,
      utcS: this.#utcS.slice(0, n),
      accelX: channels.accelX ?? null,
      accelY: channels.accelY ?? null,
      accelZ: channels.accelZ ?? null,
      gyroX: channels.gyroX ?? null,
      gyroY: channels.gyroY ?? null,
      gyroZ: channels.gyroZ ?? null,
    };
  }

  /** Median length of the acceleration vector nearer (by ratio) to 1 than to 9.8. */
  #gravityInG(axes: readonly Float32Array[]): boolean {
    const lengths: number[] = [];
    const stride = Math.max(1, Math.floor(this.#count / 5000));
    for (let i = 0; i < this.#count; i += stride) {
      const length = Math.hypot(...axes.map((axis) => axis[i]!));
      if (Number.isFinite(length)) lengths.push(length);
    }
    lengths.sort((a, b) => a - b);
    const median = lengths[lengths.length >> 1] ?? 0;
    return median < Math.sqrt(STANDARD_GRAVITY_MPS2) && median > 0.3;
  }
}

const SENSOR_FACTORS = { g: STANDARD_GRAVITY_MPS2, 'm/s²': 1, '°/s': Math.PI / 180, 'rad/s': 1 } as const;

function centile99(values: Float32Array, count: number): number {
  const sizes: number[] = [];
  const stride = Math.max(1, Math.floor(count / 5000));
  for (let i = 0; i < count; i += stride) {
    const size = Math.abs(values[i]!);
    if (Number.isFinite(size)) sizes.push(size);
  }
  sizes.sort((a, b) => a - b);
  return sizes[Math.floor(0.99 * (sizes.length - 1))] ?? 0;
}
