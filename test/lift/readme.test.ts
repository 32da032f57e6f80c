import { readFileSync } from 'node:fs';
import { transformSync } from 'esbuild';
import { describe, expect, it } from 'vitest';
import type { LiftingFamily } from '../../src/lift/lifting.ts';
import { contextOf } from './liftingFixture.ts';

const [, example] = /```ts\n([\s\S]*?)```/.exec(readFileSync('src/lift/README.md', 'utf8')) ?? [];
const { code } = transformSync(example, { loader: 'ts', format: 'esm' });
const { hinges }: { hinges: LiftingFamily } = await import(
  /* @vite-ignore */ `data:text/javascript,${encodeURIComponent(code)}`
);

describe('the example of a family in the README', () => {
  const context = contextOf(2);
  const { names, constants } = hinges.build({ breakpoints: 3 }, context);
  const { count, evaluateInto, gradientInto } = hinges.functions(constants, context);

  it('gives hinges, in closed form: 0 up to the breakpoint, then the distance to it', () => {
    expect(names).toEqual(['x1', 'x2'].flatMap((axis) => [1, 2, 3].map((i) => `hinge${i}(${axis})`)));
    expect(constants).toEqual({ places: [-0.5, 0, 0.5] });
    const out = new Float64Array(count + 1);
    evaluateInto(out, 1, [0.25, -0.75]);
    expect(Array.from(out)).toEqual([0, 0.75, 0.25, 0, 0, 0, 0]);
  });

  it('has the gradient of central differences away from the breakpoints', () => {
    const x = [0.3, -0.2];
    const J = new Float64Array(count * 2).fill(Number.NaN);
    gradientInto(J, 0, x);
    const [high, low] = [new Float64Array(count), new Float64Array(count)];
    for (let j = 0; j < 2; j++) {
      evaluateInto(high, 0, x.with(j, x[j] + 1e-6));
      evaluateInto(low, 0, x.with(j, x[j] - 1e-6));
      for (let i = 0; i < count; i++) {
        expect(Math.abs(J[i * 2 + j] - (high[i] - low[i]) / 2e-6)).toBeLessThan(1e-9);
      }
    }
  });
});
