/** The list at the side of a set-up screen: what ships, then what is the user's own. */
export function Chooser(props: {
  readonly label: string;
  readonly items: readonly {
    readonly id: string;
    readonly name: string;
    readonly mode: string;
    readonly builtIn: boolean;
  }[];
  readonly chosen: string;
  readonly onChoose: (id: string) => void;
}) {
  const { label, items, chosen, onChoose } = props;
  return (
    <nav class="chooser" aria-label={label}>
      {(['rail', 'road'] as const).map((mode) => {
        const ofMode = items.filter((item) => item.mode === mode);
        if (ofMode.length === 0) return null;
        return (
          <div key={mode}>
            <h2>{mode === 'rail' ? 'Rail' : 'Road'}</h2>
            <ul>
              {[...ofMode]
                .sort((a, b) => Number(b.builtIn) - Number(a.builtIn))
                .map(({ id, name, builtIn }) => (
                  <li key={id}>
                    <button
                      type="button"
                      class="quiet"
                      aria-current={id === chosen ? 'true' : undefined}
                      onClick={() => onChoose(id)}
                    >
                      <span class="grow">{name}</span>
                      {!builtIn && <span class="own-mark">own</span>}
                    </button>
                  </li>
                ))}
            </ul>
          </div>
        );
      })}
    </nav>
  );
}
