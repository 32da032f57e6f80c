import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  type ExportedArray,
  listLiftingConstants,
  listMatrices,
  listSettings,
} from '../../src/export/arrays.ts';
import { headerName, writeCHeader } from '../../src/export/cHeader.ts';
import { cLiteral } from '../../src/export/numberText.ts';
import { commentText, symbolName } from '../../src/export/symbols.ts';
import type { StudyResult } from '../../src/findings/studyResult.ts';
import { smallResult } from '../findings/smallResult.ts';
import { bitsOf, floatBitsOf, UGLY } from './bits.ts';
import { hasCompiler, runC } from './compiler.ts';

const OPTIONS = { name: 'pendulum', version: '0.1.0' };
const SMALL = 'liftwright_pendulum';
const CAPITAL = 'LIFTWRIGHT_PENDULUM';

const arraysOf = ({ design }: StudyResult): ExportedArray[] =>
  [...listMatrices(design), ...listSettings(design), ...listLiftingConstants(design)].filter(
    ({ matrix }) => matrix.data.length > 0,
  );

/** The small study with other numbers where the gain K, the target Tz and the bounds stand. */
function withNumbers(values: readonly number[]): StudyResult {
  const result = smallResult();
  const { design } = result;
  const fill = (length: number) => Float64Array.from({ length }, (_, i) => values[i % values.length]);
  const { K, Tz, qp } = design;
  return {
    ...result,
    design: {
      ...design,
      K: { ...K, data: fill(K.data.length) },
      Tz: { ...Tz, data: fill(Tz.data.length) },
      qp: { ...qp, Wl: fill(qp.m), Wu: fill(qp.m) },
    },
  };
}

/** An independent reading of a header: every array's numbers by name, by the JavaScript reader of decimals. */
function parseHeader(text: string): Map<string, number[]> {
  const bare = text.replace(/\/\*[\s\S]*?\*\//g, '');
  const arrays = new Map<string, number[]>();
  for (const [, name, body] of bare.matchAll(/static const \w+ (\w+)(?:\[\w+\])* = ([^;]*);/g)) {
    const numbers = body
      .replace(/[{}\s]/g, '')
      .split(',')
      .map((word) => Number(word.replace(/\w+_INFINITY/, 'Infinity').replace('NAN', 'NaN')));
    arrays.set(name, numbers);
  }
  return arrays;
}

/** A program that prints the bits of every array of a header, one line an array. */
function printer(result: StudyResult, header: string, small: string): string {
  const names = arraysOf(result).filter(({ whole }) => !whole);
  const print = names.map(
    ({ name, matrix }) => `show("${name}", (const real *)${small}_${name}, ${matrix.data.length});`,
  );
  return `#include "${header}"
#include <stdio.h>
#include <string.h>
typedef ${small}_real real;
static void show(const char *name, const real *values, int count) {
  int i, k;
  printf("%s", name);
  for (i = 0; i < count; i++) {
    unsigned char bytes[sizeof(real)];
    const int one = 1;
    memcpy(bytes, &values[i], sizeof(real));
    printf(" ");
    for (k = 0; k < (int)sizeof(real); k++) {
      printf("%02x", bytes[*(const char *)&one ? (int)sizeof(real) - 1 - k : k]);
    }
  }
  printf("\\n");
}
int main(void) {
  ${print.join('\n  ')}
  return 0;
}
`;
}

describe('the C header', () => {
  it('holds every array of the records bit for bit, read back by another reader of decimals (relation)', () => {
    const value = fc.oneof(fc.double({ noNaN: true }), fc.constantFrom(...UGLY));
    fc.assert(
      fc.property(fc.array(value, { minLength: 1, maxLength: 40 }), (values) => {
        const result = withNumbers(values);
        const parsed = parseHeader(writeCHeader(result, OPTIONS));
        for (const { name, matrix } of arraysOf(result)) {
          expect(parsed.get(`${SMALL}_${name}`)?.map(bitsOf), name).toEqual(Array.from(matrix.data, bitsOf));
        }
        expect(parsed.get(`${SMALL}_sample_time`)).toEqual([result.sampleTime]);
      }),
      { numRuns: 12 },
    );
  });

  it('gives each name the numbers of the record that it stands for (relation: by a list written apart)', () => {
    const { design, predictor, sampleTime } = smallResult();
    const { problem, qp } = design;
    const { scaling, lifting } = predictor;
    const parsed = parseHeader(writeCHeader(smallResult(), OPTIONS));
    const due: Record<string, ArrayLike<number>> = {
      sample_time: [sampleTime],
      disturbance_gain: [problem.disturbanceGain],
      A: predictor.A.data,
      B: predictor.B.data,
      C: predictor.C.data,
      H: qp.H.data,
      F: qp.F.data,
      G: qp.G.data,
      E: qp.E.data,
      Wl: qp.Wl,
      Wu: qp.Wu,
      softness: qp.softness,
      K: design.K.data,
      P: design.P.data,
      Tz: design.Tz.data,
      Tu: design.Tu.data,
      x_centre: scaling.x.centre,
      x_half: scaling.x.half,
      u_centre: scaling.u.centre,
      u_half: scaling.u.half,
      y_centre: scaling.y.centre,
      y_half: scaling.y.half,
      u_min: problem.inputLimits.min,
      u_max: problem.inputLimits.max,
      u_rate: problem.rateLimits,
      Q: problem.Q.data,
      S: problem.S.data,
      R: problem.R.data,
      blocks: qp.blocks,
      row_kind: qp.rows.map(({ kind }) => ['input', 'rate', 'output'].indexOf(kind)),
      row_channel: qp.rows.map(({ channel }) => channel),
      row_step: qp.rows.map(({ step }) => step),
    };
    lifting.parts.forEach(({ keep, constants }, i) => {
      if (keep.length === 0) return;
      due[`part${i + 1}_keep`] = keep;
      for (const [key, value] of Object.entries(constants)) {
        const flat = [value].flat(3) as (number | string)[];
        if (flat.every((entry) => typeof entry === 'number')) due[`part${i + 1}_${key}`] = flat as number[];
      }
    });
    expect([...parsed.keys()].sort()).toEqual(
      Object.keys(due)
        .map((name) => `${SMALL}_${name}`)
        .sort(),
    );
    for (const [name, values] of Object.entries(due)) {
      expect(parsed.get(`${SMALL}_${name}`)?.map(bitsOf), name).toEqual(Array.from(values, bitsOf));
    }
  });

  it.each([
    [0, '0.0'],
    [-0, '-0'],
    [1, '1.0'],
    [1e21, '1e+21'],
    [123456789012345680000, '123456789012345680000.0'],
    [5e-324, '5e-324'],
    [0.1, '0.1'],
    [Number.NEGATIVE_INFINITY, '-INF'],
  ])('%d is a floating constant, never an integer (C99 6.4.4.2)', (value, text) => {
    const literal = cLiteral(value, 'INF');
    expect(literal).toBe(Object.is(value, -0) ? '-0.0' : text);
    if (Number.isFinite(value)) expect(bitsOf(Number(literal))).toBe(bitsOf(value));
  });

  it('is the same bytes for the same result, and its symbols all carry the prefix', () => {
    const text = writeCHeader(smallResult(), OPTIONS);
    expect(writeCHeader(smallResult(), OPTIONS)).toBe(text);
    const code = text.replace(/\/\*[\s\S]*?\*\//g, '');
    for (const [, name] of code.matchAll(/^#(?:define|ifndef|ifdef) (\w+)/gm))
      expect(name).toMatch(/^LIFTWRIGHT_PENDULUM_/);
    for (const [, name] of code.matchAll(/(?:static const \w+|typedef \w+) (\w+)/g)) {
      expect(name).toMatch(/^liftwright_pendulum_/);
    }
    expect(text).toContain(`#ifndef ${CAPITAL}_H\n#define ${CAPITAL}_H\n`);
    expect(text.trimEnd().endsWith(`#endif /* ${CAPITAL}_H */`)).toBe(true);
    expect(text).not.toMatch(/\/(?:tmp|work|home|root)\b|\b20\d\d-\d\d/);
    expect(text).toContain('Keep independent limits');
    expect(text).toContain('The arm moves fast');
  });

  it('no line passes the 4095 characters, no name the 63, that C99 5.2.4.1 promises', () => {
    const name = 'a very long name of a study indeed, and then some more';
    const result = smallResult();
    const wide = { rows: 2, cols: 400, data: new Float64Array(800).fill(-1.2345678901234567e-101) };
    const text = writeCHeader({ ...result, design: { ...result.design, Tz: wide } }, { ...OPTIONS, name });
    for (const line of text.split('\n')) expect(line.length).toBeLessThan(4095);
    for (const [word] of text.matchAll(/\b(?:LIFTWRIGHT|liftwright)_\w+/g))
      expect(word.length).toBeLessThanOrEqual(63);
  });

  it('names of studies become identifiers, texts within comments stay harmless', () => {
    expect(symbolName('Snap-Through (2nd)')).toBe('snap_through_2nd');
    expect(symbolName('Über−Motor')).toBe('uber_motor');
    expect(symbolName('---')).toBe('study');
    expect(headerName('x y')).toBe('liftwright_x_y.h');
    expect(commentText('a */ b /* c ??/ d\ne·²')).toBe('a * / b / * c ? ?/ d e*^2');
    fc.assert(
      fc.property(fc.string({ unit: 'binary' }), (text) => {
        expect(commentText(text)).toMatch(/^[\x20-\x7e]*$/);
        expect(commentText(text)).not.toMatch(/\*\/|\/\*|\?\?/);
      }),
    );
  });

  it('needs math.h only where a bound is infinite, and refuses float for a number beyond its range', () => {
    expect(writeCHeader(withNumbers([1]), OPTIONS)).not.toContain('math.h');
    expect(writeCHeader(withNumbers([1, Number.POSITIVE_INFINITY]), OPTIONS)).toContain('#include <math.h>');
    expect(writeCHeader(withNumbers([1e300]), OPTIONS)).toContain('#error');
    expect(writeCHeader(withNumbers([1e38]), OPTIONS)).not.toContain('#error');
  });
});

describe.runIf(hasCompiler || process.env.CI === 'true')(
  'the C header under gcc -std=c99 with warnings as errors',
  () => {
    const compare = (result: StudyResult, output: string, bits: (value: number) => string) => {
      const lines = new Map(
        output
          .trimEnd()
          .split('\n')
          .map((line) => [line.split(' ')[0], line.split(' ').slice(1)]),
      );
      const due = arraysOf(result).filter(({ whole }) => !whole);
      expect(lines.size).toBe(due.length);
      for (const { name, matrix } of due)
        expect(lines.get(name), name).toEqual(Array.from(matrix.data, bits));
    };
    // Float: without the doubles that it cannot hold.
    const inFloat = UGLY.filter((value) => !Number.isFinite(value) || Number.isFinite(Math.fround(value)));
    const halfway = [
      1 + 2 ** -24,
      1 + 3 * 2 ** -24,
      1 + 2 ** -24 + 2 ** -52,
      2 ** -150,
      1.5 * 2 ** -149,
      3.4028235677973362e38,
    ];

    it.each([
      ['the study', smallResult()],
      ['the ugly numbers', withNumbers(UGLY)],
    ])(
      'compiles as double and holds the 64-bit patterns of the records: %s (independent program: gcc)',
      (_, result) => {
        const main = printer(result, headerName('pendulum'), SMALL);
        const { output, message } = runC({
          [headerName('pendulum')]: writeCHeader(result, OPTIONS),
          'main.c': main,
        });
        expect(message).toBe('');
        compare(result, output, bitsOf);
      },
    );

    it.each([
      ['the study', smallResult()],
      ['the ugly numbers and ties of rounding', withNumbers([...inFloat, ...halfway])],
    ])(
      'compiles as float and holds Math.fround of the records: %s (independent program: gcc)',
      (_, result) => {
        const main = printer(result, headerName('pendulum'), SMALL);
        const files = { [headerName('pendulum')]: writeCHeader(result, OPTIONS), 'main.c': main };
        const { output, message } = runC(files, [`-D${CAPITAL}_FLOAT`]);
        expect(message).toBe('');
        compare(result, output, floatBitsOf);
      },
    );

    it('an own value for the missing bounds, a hostile title, and two studies in one file all compile', () => {
      const result = { ...smallResult(), title: 'evil */ int x; /* ??/ title \\' };
      const files = {
        'liftwright_one.h': writeCHeader(result, { ...OPTIONS, name: 'one' }),
        'liftwright_two.h': writeCHeader(result, { ...OPTIONS, name: 'two' }),
        'main.c': `#define LIFTWRIGHT_ONE_INFINITY 1e30
#define LIFTWRIGHT_TWO_INFINITY 1e30
#include "liftwright_one.h"
#include "liftwright_two.h"
#include "liftwright_one.h"
#include <stdio.h>
int main(void) {
  printf("%d %d %g\\n", LIFTWRIGHT_ONE_NZ, LIFTWRIGHT_TWO_THETA_ONE, liftwright_two_Wl[LIFTWRIGHT_TWO_NROWS - 14]);
  return 0;
}
`,
      };
      const { output, message } = runC(files);
      expect(message).toBe('');
      const { qp } = result.design;
      expect(output).toBe(`${qp.nz} ${qp.theta.one} -1e+30\n`);
    });

    it('the float build of a number beyond float stops with the name of the constant', () => {
      const header = writeCHeader(withNumbers([1e300]), OPTIONS);
      const files = { 'h.h': header, 'main.c': '#include "h.h"\nint main(void) { return 0; }\n' };
      expect(runC(files, [`-D${CAPITAL}_FLOAT`]).message).toContain('does not fit into float');
      expect(runC(files).message).toBe('');
    });
  },
);

describe.runIf(!hasCompiler && process.env.CI !== 'true')('without gcc on this machine', () => {
  it('the header is compared with the records by text alone; install gcc to compile it as well', () => {
    expect(hasCompiler).toBe(false);
  });
});
