import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { bindStudy } from '../../src/study/bindStudy.ts';
import { formatProblem } from '../../src/study/problem.ts';
import { readStudy } from '../../src/study/readStudy.ts';

describe('the ready studies', () => {
  it.each(readdirSync('plants'))(
    'the study of %s fits its plant: every name, unit and range',
    async (name) => {
      const file = `plants/${name}/study.yaml`;
      const { default: plant } = await import(`../../plants/${name}/plant.ts`);
      const origin = { file, hash: '', plant: `plants/${name}/plant.ts` };
      const { study, problems } = bindStudy(readStudy(readFileSync(file, 'utf8'), file), plant, origin);
      expect(problems.map(formatProblem)).toEqual([]);
      expect(study?.scenario.references.length).toBeGreaterThan(0);
    },
  );
});
