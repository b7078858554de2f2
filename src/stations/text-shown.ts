const LONGEST_SHOWN = 60;

/** A cell as a message may show it: quoted, cut, and control characters spelled out so that no terminal obeys them. */
export function shown(value: string): string {
  const cut = value.length > LONGEST_SHOWN ? `${value.slice(0, LONGEST_SHOWN)}…` : value;
  return `"${withoutControls(cut)}"`;
}

/** Control and direction characters as \\uXXXX. */
export function withoutControls(text: string): string {
  return text.replace(
    /[\p{Cc}\u200e\u200f\u202a-\u202e\u2066-\u2069]/gu,
    (character) => `\\u${character.charCodeAt(0).toString(16).padStart(4, '0')}`,
  );
}
