/** Text as it may stand in HTML, in an element or in a quoted attribute. */
export function escapeHtml(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
    .replaceAll("'", '&#39;');
}

/** A record as the text of a script: no `<` in it can end the script or open a comment. */
export function scriptJson(value: unknown): string {
  return JSON.stringify(value)
    .replaceAll('<', '\\u003c')
    .replaceAll('\u2028', '\\u2028')
    .replaceAll('\u2029', '\\u2029');
}

/** The text of a script with nothing in it that would end the element that holds it. */
export function scriptText(code: string): string {
  return code.replace(/<\/(script)/gi, '<\\/$1').replaceAll('<!--', '<\\!--');
}

/** What stands in a table for a figure that does not exist. */
export const NONE = 'none';

/** A table as it is described; all text is escaped here. */
export interface TableSpec {
  readonly caption: string;
  readonly head: readonly string[];
  /** The first cell of each row names it. */
  readonly rows: readonly (readonly string[])[];
}

/** A table with scopes, in a box that scrolls sideways on a narrow screen; an empty string where there is no row. */
export function table({ caption, head, rows }: TableSpec): string {
  if (rows.length === 0) return '';
  const name = escapeHtml(caption);
  const headCells = head.map((cell) => `<th scope="col">${escapeHtml(cell)}</th>`).join('');
  const body = rows.map(([first, ...rest]) => {
    const cells = rest.map((cell) => `<td>${escapeHtml(cell)}</td>`).join('');
    return `<tr><th scope="row">${escapeHtml(first)}</th>${cells}</tr>`;
  });
  return [
    // Scrolled by the keyboard too, hence the place in the order of focus and the name.
    `<div class="scroll" role="region" aria-label="${name}" tabindex="0"><table>`,
    `<caption>${name}</caption>`,
    ...(head.length > 0 ? [`<thead><tr>${headCells}</tr></thead>`] : []),
    `<tbody>${body.join('\n')}</tbody>`,
    '</table></div>',
  ].join('\n');
}
