/** What a reader chose on this device; a blocked storage only means that it is not remembered. */

export function readPreference<Value extends string>(
  key: string,
  allowed: readonly Value[],
  otherwise: Value,
): Value {
  try {
    const stored = window.localStorage.getItem(`gustbook.${key}`);
    return allowed.find((value) => value === stored) ?? otherwise;
  } catch {
    return otherwise;
  }
}

export function writePreference(key: string, value: string): void {
  try {
    window.localStorage.setItem(`gustbook.${key}`, value);
  } catch {
    // private windows may refuse; the choice then lasts as long as the page
  }
}
