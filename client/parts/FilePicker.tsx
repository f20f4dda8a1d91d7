import { addFiles } from '../state/uploads.ts';

/** A button that asks for recordings, several at a time. */
export function FilePicker({ label, primary = false }: { readonly label: string; readonly primary?: boolean }) {
  return (
    <label class={`button${primary ? ' primary' : ''}`}>
      {label}
      <input
        class="sr"
        type="file"
        multiple
        onChange={(e) => {
          addFiles([...(e.currentTarget.files ?? [])]);
          e.currentTarget.value = '';
        }}
      />
    </label>
  );
}
