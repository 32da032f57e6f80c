/**
 * Longest study name within symbols: with `LIFTWRIGHT_` before it and `_part12_frequencies` behind it a symbol stays within
 * the 63 characters that C99 5.2.4.1 promises to tell apart.
 */
const LONGEST = 30;

/** A study's name as part of a C identifier and of a file's name: small letters, digits and single underscores. */
export function symbolName(name: string): string {
  const plain = name
    .normalize('NFKD')
    .replace(/\p{M}/gu, '')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '_')
    .replace(/^_+|_+$/g, '')
    .slice(0, LONGEST)
    .replace(/_+$/, '');
  return plain || 'study';
}

const ASCII: Readonly<Record<string, string>> = {
  '·': '*',
  '×': 'x',
  '−': '-',
  '–': '-',
  '—': '-',
  '²': '^2',
  '³': '^3',
  '°': 'deg',
  µ: 'u',
  μ: 'u',
  Ω: 'Ohm',
  '‘': "'",
  '’': "'",
  '“': '"',
  '”': '"',
};

/** Text that is safe within a C comment: ASCII, one line, without comment marks and trigraphs. */
export function commentText(text: string): string {
  return text
    .replace(/[^\x20-\x7e]/g, (char) => ASCII[char] ?? (/\s/.test(char) ? ' ' : '_'))
    .replace(/\*(?=\/)|\/(?=\*)|\?(?=\?)/g, '$& ');
}
