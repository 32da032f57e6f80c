import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { BEGIN, END, renewSection } from '../../src/commands/readmeSection.ts';

describe('the study file reference in the README', () => {
  it('is what the table says now; npm run readme renews it (twin)', () => {
    const readme = readFileSync('README.md', 'utf8');
    expect(readme).toBe(renewSection(readme));
  });

  it('leaves everything outside its markers as it was', () => {
    const renewed = renewSection(`# A\n${BEGIN}\nOUTDATED\n${END}\nB\n`);
    expect(renewed.startsWith(`# A\n${BEGIN}\n`)).toBe(true);
    expect(renewed.endsWith(`${END}\nB\n`)).toBe(true);
    expect(renewed).not.toContain('OUTDATED');
    expect(renewSection(renewed)).toBe(renewed);
  });

  it.each(['no markers', BEGIN, END, `${END}${BEGIN}`, `${BEGIN}${BEGIN}${END}`])(
    'refuses a README without the two markers in order: %j',
    (readme) => {
      expect(() => renewSection(readme)).toThrow(RangeError);
    },
  );
});
