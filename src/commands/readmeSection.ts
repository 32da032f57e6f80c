import { readFileSync } from 'node:fs';
import { pathToFileURL } from 'node:url';
import { referenceMarkdown } from '../study/describeTable.ts';
import { writeWhole } from './writeWhole.ts';

/** Between these lines the README holds what is made from the table of the study file. */
export const BEGIN = '<!-- study file reference: made from the table by npm run readme, do not edit -->';
export const END = '<!-- end of the study file reference -->';

/**
 * The README with its section renewed.
 * @throws RangeError when the two markers are not there, once each and in order.
 */
export function renewSection(readme: string): string {
  const [before, rest, ...more] = readme.split(BEGIN);
  const [old, after, ...moreEnds] = (rest ?? '').split(END);
  if (old === undefined || after === undefined || more.length > 0 || moreEnds.length > 0) {
    throw new RangeError(`README.md must hold these two lines once each, in this order: ${BEGIN} ${END}`);
  }
  return `${before}${BEGIN}\n\n${referenceMarkdown()}\n${END}${after}`;
}

// `npm run readme`: renews README.md in the present folder.
if (import.meta.url === pathToFileURL(process.argv[1] ?? '').href) {
  writeWhole('README.md', renewSection(readFileSync('README.md', 'utf8')));
}
