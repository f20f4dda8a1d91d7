import { useEffect, useState } from 'preact/hooks';

/** A value that tells its listeners when it changes: the whole of the page's state is one of these. */
export interface Observable<T> {
  get(): T;
  /** Merges a change; equal values tell nobody. */
  set(change: Partial<T>): void;
  listen(listener: () => void): () => void;
}

export function observable<T extends object>(initial: T): Observable<T> {
  let value = initial;
  const listeners = new Set<() => void>();
  return {
    get: () => value,
    set(change) {
      const keys = Object.keys(change) as (keyof T)[];
      if (keys.every((key) => Object.is(value[key], change[key]))) return;
      value = { ...value, ...change };
      for (const listener of listeners) listener();
    },
    listen(listener) {
      listeners.add(listener);
      return () => listeners.delete(listener);
    },
  };
}

/** The part of an observable that a component shows; it renders again when that part changes. */
export function useSlice<T, S>(source: Observable<T>, select: (value: T) => S): S {
  const [slice, setSlice] = useState(() => select(source.get()));
  useEffect(() => {
    const update = () => setSlice(() => select(source.get()));
    update();
    return source.listen(update);
  }, [source]);
  return slice;
}
