import { useEffect, useState } from 'preact/hooks';
import type { ColumnNames, ColumnPreview, RecordingSummary } from '../../shared/schema/api.ts';
import { api } from '../api.ts';
import { sentence } from '../shell/Messages.tsx';
import { notify, report } from '../state/app-state.ts';

const SPEED_UNITS = ['m/s', 'km/h', 'mph', 'kn'];

/** What a column may be taken for, and in which units it may stand. */
const FIELDS: readonly (readonly [field: string, label: string, units: readonly string[]])[] = [
  ['latDeg', 'latitude', []],
  ['lonDeg', 'longitude', []],
  ['utcS', 'time', ['s', 'ms']],
  ['date', 'date', []],
  ['timeOfDay', 'time of day', []],
  ['speedMps', 'speed', SPEED_UNITS],
  ['courseRad', 'course', ['°', 'rad']],
  ['elevationM', 'elevation', ['m', 'ft']],
  ['accuracyM', 'accuracy', ['m', 'ft']],
  ['hdop', 'HDOP', []],
  ['satellites', 'satellites', []],
  ['accelX', 'acceleration x', ['m/s²', 'g']],
  ['accelY', 'acceleration y', ['m/s²', 'g']],
  ['accelZ', 'acceleration z', ['m/s²', 'g']],
  ['gyroX', 'turn rate x', ['rad/s', '°/s']],
  ['gyroY', 'turn rate y', ['rad/s', '°/s']],
  ['gyroZ', 'turn rate z', ['rad/s', '°/s']],
];

interface Choice {
  readonly field: string;
  readonly unit: string;
}

/** The first rows of a delimited file, and above each column what it is: the file is then read anew. */
export function NameColumns({
  recording,
  onDone,
}: {
  readonly recording: RecordingSummary;
  readonly onDone: () => void;
}) {
  const [preview, setPreview] = useState<ColumnPreview | null>(null);
  const [choices, setChoices] = useState<readonly Choice[]>([]);
  useEffect(() => {
    api
      .preview(recording.id)
      .then((answer) => {
        setPreview(answer);
        setChoices(
          answer.headers.map((header) => {
            const use = answer.columns.find((column) => column.header === header);
            const known = FIELDS.find(([field]) => field === use?.field);
            if (use === undefined || known === undefined) return { field: '', unit: '' };
            return { field: use.field, unit: known[2].includes(use.unit) ? use.unit : '' };
          }),
        );
      })
      .catch((error: unknown) => {
        onDone();
        report(error);
      });
  }, [recording.id]);
  if (preview === null) return <p class="quiet-text">Reading the first rows …</p>;
  const chosen = new Set(choices.map(({ field }) => field));
  const hasTime = chosen.has('utcS') || (chosen.has('date') && chosen.has('timeOfDay')) || chosen.has('timeOfDay');
  const missing = [
    ...(chosen.has('latDeg') ? [] : ['latitude']),
    ...(chosen.has('lonDeg') ? [] : ['longitude']),
    ...(hasTime ? [] : ['time']),
  ];
  const change = (at: number, choice: Choice) =>
    setChoices(
      choices.map((old, i) =>
        i === at ? choice : old.field === choice.field && choice.field !== '' ? { field: '', unit: '' } : old,
      ),
    );
  const send = () => {
    api
      .nameColumns(recording.id, namesOf(preview.headers, choices))
      .then(() => {
        notify('The file is being read again with these columns');
        onDone();
      })
      .catch(report);
  };
  return (
    <form
      class="name-columns"
      onSubmit={(e) => {
        e.preventDefault();
        send();
      }}
    >
      {preview.fault !== null && (
        <p>
          <strong>{sentence(preview.fault.cause)}</strong>
        </p>
      )}
      <div class="scroll-x" tabIndex={0} role="region" aria-label="First rows">
        <table class="plain">
          <thead>
            <tr>
              {preview.headers.map((header, i) => {
                const choice = choices[i] ?? { field: '', unit: '' };
                const units = FIELDS.find(([field]) => field === choice.field)?.[2] ?? [];
                return (
                  <th key={header + String(i)} scope="col">
                    <span class="column-name">{header === '' ? `column ${String(i + 1)}` : header}</span>
                    <select
                      aria-label={`Column ${header} is`}
                      value={choice.field}
                      onChange={(e) => change(i, { field: e.currentTarget.value, unit: '' })}
                    >
                      <option value="">not used</option>
                      {FIELDS.map(([field, label]) => (
                        <option key={field} value={field}>
                          {label}
                        </option>
                      ))}
                    </select>
                    {units.length > 0 && (
                      <select
                        aria-label={`Unit of column ${header}`}
                        value={choice.unit}
                        onChange={(e) => change(i, { field: choice.field, unit: e.currentTarget.value })}
                      >
                        <option value="">as recognised</option>
                        {units.map((unit) => (
                          <option key={unit} value={unit}>
                            {unit}
                          </option>
                        ))}
                      </select>
                    )}
                  </th>
                );
              })}
            </tr>
          </thead>
          <tbody>
            {preview.rows.slice(0, 6).map((cells, i) => (
              <tr key={i}>
                {cells.map((cell, k) => (
                  <td key={k}>{cell}</td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <div class="row">
        <button type="submit" class="primary" disabled={missing.length > 0}>
          Read with these columns
        </button>
        <button type="button" onClick={onDone}>
          Leave it
        </button>
        {missing.length > 0 && <span>Still missing: {missing.join(', ')}.</span>}
      </div>
    </form>
  );
}

function namesOf(headers: readonly string[], choices: readonly Choice[]): ColumnNames {
  const entries = choices.flatMap(({ field, unit }, i) => {
    const header = headers[i];
    if (field === '' || header === undefined) return [];
    return [[field, unit === '' ? { header } : { header, unit }] as const];
  });
  return Object.fromEntries(entries);
}
