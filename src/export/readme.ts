import type { Caution } from '../findings/caution.ts';
import { formatFigure, plural, withUnit } from '../findings/figures.ts';
import { findCautions } from '../findings/findCautions.ts';
import { STANDING_HAZARDS } from '../findings/hazards.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import type { ControlProblem } from '../mpc/problem.ts';
import { listLiftingConstants, listMatrices, SIZE_MEANINGS, type SizeName, sizesOf } from './arrays.ts';
import { headerName } from './cHeader.ts';
import { liftingFormula } from './liftingFormulas.ts';
import { shortest } from './numberText.ts';
import type { ExportOptions } from './options.ts';
import type { WorkedExample } from './workedExample.ts';

/**
 * The sheet that goes with the exported matrices: what each file holds, how the input is computed from it, one decision worked
 * through, the hazards, the cautions that are open, and the block to sign. Markdown, plain words.
 */
export function writeReadme(result: StudyResult, options: ExportOptions, example: WorkedExample): string {
  const { plant, design } = result;
  const cautions = findCautions(result).filter(({ severity }) => severity !== 'note');
  const sections = [
    [
      `# ${plainText(result.title)}: the controller as matrices`,
      `For the plant ${plant.name}: ${plainText(plant.description)} Made by liftwright ${options.version}; study \`${result.studyHash}\`, data \`${result.dataHash}\`, seed ${result.seed}.`,
    ],
    ['## Before anything moves', bullets([...STANDING_HAZARDS, ...plant.hazards].map(plainText))],
    ['## Cautions that are open', describeCautions(cautions)],
    ['## Files', describeFiles(result, options)],
    ['## Sizes', describeSizes(result)],
    ['## How the input is computed', ...describeSteps(design.problem)],
    ['## theta', describeTheta(result)],
    ['## Lifting', ...describeLifting(result)],
    ['## Channels and limits', ...describeChannels(design.problem)],
    ['## One decision worked through', ...describeExample(result, example)],
    [
      '## Signatures',
      table(
        ['', 'name', 'qualification', 'date', 'signature'],
        ['Designed by', 'Reviewed by', 'Approved by (licensed or otherwise competent person)'].map((who) => [
          who,
          '',
          '',
          '',
          '',
        ]),
      ),
      'Reviewed means: the worked decision was computed again by other means from these files, the limits and units were compared with the machine, and the cautions above were accepted one by one.',
    ],
  ];
  return `${sections.flat().join('\n\n')}\n`;
}

/** Text from a study or plant on one line, without what markdown would take for marks of a table or a tag. */
function plainText(text: string): string {
  return text.replace(/\s+/g, ' ').replace(/[|<]/g, '\\$&').trim();
}

const bullets = (lines: readonly string[]) => lines.map((line) => `- ${line}`).join('\n');

function table(head: readonly string[], rows: readonly (readonly string[])[]): string {
  const line = (cells: readonly string[]) => `| ${cells.join(' | ')} |`;
  return [line(head), line(head.map(() => '---')), ...rows.map(line)].join('\n');
}

function describeCautions(cautions: readonly Caution[]): string {
  if (cautions.length === 0) return 'None above a note.';
  return bullets(
    cautions.map(
      ({ severity, code, sentence, whatToDo }) =>
        `**${severity}** \`${code}\`: ${plainText(sentence)} ${plainText(whatToDo)}`,
    ),
  );
}

function describeFiles({ design }: StudyResult, { name }: ExportOptions): string {
  return table(
    ['file', 'shape', 'unit', 'what it is'],
    [
      ['README.md', '', '', 'this sheet'],
      [
        'controller.json',
        '',
        'physical and scaled, as each key says',
        'everything below in one file, with scaling, lifting, weights, limits, names and hashes',
      ],
      ['controller.schema.json', '', '', 'JSON Schema (draft 2020-12) of controller.json'],
      ['example.json', '', 'physical and scaled', 'the decision worked through below, in full'],
      [
        headerName(name),
        '',
        'in a comment at each constant',
        'C99 header of the same constants; double, or float by one macro',
      ],
      ...listMatrices(design).map(({ name: matrix, shape, unit, meaning }) => [
        `matrices/${matrix}.mtx`,
        shape.join(' x '),
        unit,
        meaning,
      ]),
    ],
  ).concat(
    '\n\nThe `.mtx` files are Matrix Market text: `array` lists all entries column by column, `coordinate` the entries that are not zero, counted from 1. All numbers are the shortest decimals that read back as the same double. `inf` is a bound where there is none.',
  );
}

function describeSizes({ design }: StudyResult): string {
  const sizes = Object.entries(sizesOf(design)) as [SizeName, number][];
  return table(
    ['size', 'value', 'what it counts'],
    sizes.map(([name, value]) => [name, String(value), SIZE_MEANINGS[name]]),
  );
}

function describeSteps({ delay, preview, disturbanceGain, horizon }: ControlProblem): string[] {
  const ahead = preview
    ? `r holds the reference ${delay + 1} to ${delay + horizon} samples ahead`
    : 'r holds the present reference N times';
  const roll =
    delay > 0
      ? `Roll it through the ${plural(delay, 'input')} that ${delay === 1 ? 'is' : 'are'} still under way, oldest first: z = A z + B u + d, each with its own scaled u; after each, lift the scaled coordinates anew that stand in the first NX entries of z: z = psi(x).`
      : 'There is no input delay to roll it through.';
  return [
    'Every sample, with all numbers scaled by scaled = (physical - centre) / half:',
    [
      '1. Scale the measured coordinates and lift them: z = psi(x).',
      `2. From the second sample on, correct the disturbance estimate with the input u that really acted over the last sample and the lifted measurement z_before at its beginning: d = d + ${shortest(disturbanceGain)} (z - A z_before - B u - d). It starts at 0.`,
      `3. ${roll}`,
      `4. Put theta = (z, u_prev, r, d, 1) together; u_prev is the last input sent, ${ahead}.`,
      "5. Find the U that minimises U' H U / 2 + (F theta)' U + sum of e_i^2 / (2 softness_i) subject to Wl + E theta <= G U + e <= Wu + E theta, with e_i = 0 wherever softness_i = 0.",
      '6. Send the first NU entries of U, in physical units: u = centre + half U. Clamp to the rate limit, then to the input limit.',
      '7. If the solver does not end at an optimum, send the next input of the last plan instead; without one, hold the last input; and report it.',
    ].join('\n'),
    'Where no limit is active the first move is -K theta, which is a check of the solver and no replacement for it.',
  ];
}

function describeTheta({ design }: StudyResult): string {
  const { theta, nz, nu, ny, N } = design.qp;
  const row = (from: number, count: number, what: string) => [
    count === 1 ? String(from) : `${from} to ${from + count - 1}`,
    String(count),
    what,
  ];
  return table(
    ['entries, from 0', 'number', 'what'],
    [
      row(theta.z, nz, 'z, lifted state after the delay'),
      row(theta.uPrev, nu, 'u_prev, last input sent'),
      row(theta.r, N * ny, 'r, reference: all outputs of the first step, then of the second, ...'),
      row(theta.d, nz, 'd, disturbance estimate in lifted coordinates'),
      row(theta.one, 1, 'the number 1'),
    ],
  );
}

function describeLifting({ design, plant }: StudyResult): string[] {
  const { lifting } = design.problem.predictor;
  const constants = listLiftingConstants(design);
  let from = 0;
  const rows = lifting.parts.map((part, i) => {
    const start = from;
    from += part.keep.length;
    const entries = part.keep.length === 0 ? 'none' : `${start} to ${from - 1}`;
    const own = constants.filter(({ name }) => name.startsWith(`part${i + 1}_`)).map(({ name }) => name);
    return [String(i + 1), part.family, entries, plainText(liftingFormula(part)), own.join(', ') || 'none'];
  });
  const written = lifting.parts.flatMap(({ constants: { functions } }) =>
    Array.isArray(functions) ? (functions as readonly string[]) : [],
  );
  return [
    'z = psi(x) in scaled coordinates, part by part. Constants stand in controller.json under lifting.parts, and in the header under the names given here. part…_keep lists which functions of the family are entries of z; duplicates of others are left out.',
    table(['part', 'family', 'entries of z, from 0', 'function number i', 'constants'], rows),
    ...(written.length > 0
      ? [
          `The functions ${written.map(plainText).join(', ')} are code in the file of the plant ${plant.name}, with its parameters at their nominal values: write them by hand on the target and compare with example.json.`,
        ]
      : []),
    `Names of all entries: ${lifting.names.map(plainText).join(', ')}.`,
  ];
}

function describeChannels({
  predictor,
  inputLimits,
  rateLimits,
  outputLimits,
  Q,
  S,
  R,
}: ControlProblem): string[] {
  const { coordinates, inputs, outputs, scaling } = predictor;
  const bound = (value: number, unit: string) => (Number.isFinite(value) ? withUnit(value, unit) : 'none');
  const diagonal = (M: typeof Q, i: number) => formatFigure(M.data[i * M.cols + i]);
  const scaled = (key: keyof typeof scaling, i: number) =>
    `${shortest(scaling[key].centre[i])} + ${shortest(scaling[key].half[i])} * scaled`;
  return [
    table(
      ['coordinate', 'unit', 'physical ='],
      coordinates.map(({ name, unit }, i) => [plainText(name), unit, scaled('x', i)]),
    ),
    table(
      [
        'input',
        'unit',
        'physical =',
        'lowest',
        'highest',
        'fastest change',
        'weight of a move',
        'weight of the level',
      ],
      inputs.map(({ name, unit }, j) => [
        plainText(name),
        unit,
        scaled('u', j),
        bound(inputLimits.min[j], unit),
        bound(inputLimits.max[j], unit),
        bound(rateLimits[j], `${unit}/s`),
        diagonal(R, j),
        diagonal(S, j),
      ]),
    ),
    table(
      ['output', 'unit', 'physical =', 'weight of the error'],
      outputs.map(({ name, unit }, i) => [plainText(name), unit, scaled('y', i), diagonal(Q, i)]),
    ),
    outputLimits.length === 0
      ? 'No output is limited.'
      : table(
          ['limited output', 'lowest', 'highest', 'kind', 'from step'],
          outputLimits.map(({ output, min, max, weight, fromStep }) => [
            plainText(outputs[output].name),
            bound(min, outputs[output].unit),
            bound(max, outputs[output].unit),
            weight === Number.POSITIVE_INFINITY
              ? 'hard'
              : `soft, weight ${formatFigure(weight)} on (excess / half range)^2`,
            String(fromStep),
          ]),
        ),
    'Weights act on scaled deviations. They are in H and F already.',
  ];
}

/** So many entries of a vector are shown; the rest stands in example.json. */
const SHOWN = 6;

function describeExample({ design, runs }: StudyResult, example: WorkedExample): string[] {
  const show = (values: readonly number[]) =>
    values.slice(0, SHOWN).map(shortest).join(', ') +
    (values.length > SHOWN ? `, … (${values.length} in all)` : '');
  const record = runs[0]?.record;
  const { coordinates, inputs } = design.problem.predictor;
  const named = (values: readonly number[], channels: readonly { name: string; unit: string }[]) =>
    values
      .map((value, i) => `${plainText(channels[i].name)} ${shortest(value)} ${channels[i].unit}`)
      .join(', ');
  return [
    `${example.about} Full vectors: example.json.`,
    [
      `- measured: ${named(example.x, coordinates)}`,
      `- scaled: ${show(example.xScaled)}`,
      `- lifted: ${show(example.zMeasured)}`,
      `- lifted, after the delay: ${show(example.z)}`,
      `- input before: ${named(example.uPrev, inputs)}; scaled ${show(example.uPrevScaled)}`,
      `- theta: ${show(example.theta)}`,
      `- F theta: ${show(example.q)}`,
      `- Wl + E theta: ${show(example.lower)}`,
      `- Wu + E theta: ${show(example.upper)}`,
      `- U: ${show(example.U)} (${example.status})`,
      `- -K theta: ${show(example.unconstrained)}`,
      `- **to send: ${named(example.u, inputs)}**`,
    ].join('\n'),
    ...(record && record.steps > 0
      ? [
          `The simulated run, with the scenario's noise on the measurement, began with ${named(Array.from(record.u.subarray(0, record.nu)), inputs)}.`,
        ]
      : []),
  ];
}
