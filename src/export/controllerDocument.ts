import { STANDING_HAZARDS } from '../findings/hazards.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import { type Matrix, toRows } from '../numerics/matrix.ts';
import type { Channel, InputChannel } from '../plant/plant.ts';
import { CONTROLLER_FORMAT, CONTROLLER_FORMAT_VERSION, type ExportOptions } from './options.ts';

/** Everything that defines the controller, as plain data for `controller.json`; `readController` makes the design of it. */
export function controllerDocument(result: StudyResult, { name, version }: ExportOptions) {
  const { plant, design } = result;
  const { problem, qp, notes } = design;
  const { predictor } = problem;
  const { scaling, lifting } = predictor;
  const described = (
    channels: readonly (Channel & Pick<InputChannel, 'rate'>)[],
    key: keyof typeof scaling,
  ) =>
    channels.map((channel, i) => ({
      name: channel.name,
      unit: channel.unit,
      min: channel.min,
      max: channel.max,
      rate: channel.rate,
      centre: scaling[key].centre[i],
      half: scaling[key].half[i],
    }));
  return {
    $schema: './controller.schema.json',
    format: CONTROLLER_FORMAT,
    formatVersion: CONTROLLER_FORMAT_VERSION,
    program: `liftwright ${version}`,
    name,
    title: result.title,
    hashes: { study: result.studyHash, data: result.dataHash },
    seed: result.seed,
    safety: { standing: STANDING_HAZARDS, plant: plant.hazards },
    reading: {
      numbers:
        'Shortest decimals that read back as the same double. "Infinity" and "-Infinity": no limit there, in softness and weights a hard limit; "NaN": not available.',
      scaled: 'scaled = (physical - centre) / half, for each channel; matrices act on scaled numbers.',
      matrices: 'data holds the rows.',
    },
    plant: { name: plant.name, description: plant.description, parameters: plant.parameters },
    sampleTime: predictor.sampleTime,
    scaling: {
      coordinates: described(predictor.coordinates, 'x'),
      inputs: described(predictor.inputs, 'u'),
      outputs: described(predictor.outputs, 'y'),
    },
    lifting: {
      nx: lifting.nx,
      nz: lifting.nz,
      names: lifting.names,
      parts: lifting.parts,
      dropped: lifting.dropped,
      constantIndex: lifting.constantIndex,
    },
    predictor: {
      form: predictor.form,
      A: matrix(predictor.A),
      B: matrix(predictor.B),
      C: matrix(predictor.C),
      N: predictor.N.map(matrix),
      fit: predictor.fit,
    },
    problem: {
      horizon: problem.horizon,
      blocks: problem.blocks,
      Q: matrix(problem.Q),
      S: matrix(problem.S),
      R: matrix(problem.R),
      terminal: problem.terminal,
      inputLimits: { min: problem.inputLimits.min, max: problem.inputLimits.max },
      rateLimits: problem.rateLimits,
      outputLimits: problem.outputLimits.map(({ output, min, max, weight, fromStep }) => ({
        output,
        min,
        max,
        weight,
        fromStep,
      })),
      delay: problem.delay,
      preview: problem.preview,
      disturbanceGain: problem.disturbanceGain,
    },
    qp: {
      N: qp.N,
      nu: qp.nu,
      ny: qp.ny,
      nz: qp.nz,
      n: qp.n,
      m: qp.m,
      ntheta: qp.ntheta,
      theta: { z: qp.theta.z, uPrev: qp.theta.uPrev, r: qp.theta.r, d: qp.theta.d, one: qp.theta.one },
      H: matrix(qp.H),
      F: matrix(qp.F),
      G: matrix(qp.G),
      E: matrix(qp.E),
      Wl: Array.from(qp.Wl),
      Wu: Array.from(qp.Wu),
      softness: Array.from(qp.softness),
      rows: qp.rows.map(({ kind, channel, step }) => ({ kind, channel, step })),
      blocks: qp.blocks,
      condition: qp.condition,
    },
    law: {
      K: matrix(design.K),
      P: matrix(design.P),
      Tz: matrix(design.Tz),
      Tu: matrix(design.Tu),
      notes: {
        clippedModes: notes.clippedModes,
        riccatiResidual: notes.riccatiResidual,
        riccatiConverged: notes.riccatiConverged,
      },
    },
  };
}

function matrix(M: Matrix) {
  return { rows: M.rows, cols: M.cols, data: toRows(M) };
}
