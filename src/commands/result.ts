import { datasetBytes } from '../export/datasetBytes.ts';
import type { StudyResult } from '../findings/studyResult.ts';
import type { OpenStudy } from './openStudy.ts';
import { readStage, type StageContents, sha256 } from './stageFiles.ts';

/** The records of all stages as findings, report and export read them. */
export function makeResult({ study, plant }: OpenStudy, stages: StageContents): StudyResult {
  const { substeps, dataset } = stages.experiment;
  return {
    title: study.title,
    studyHash: study.hash,
    dataHash: sha256(datasetBytes(dataset)),
    seed: study.seed,
    plant,
    sampleTime: study.sampleTime,
    scenario: study.scenario,
    substeps,
    dataset,
    predictor: stages.fit.predictor,
    ...stages.assess,
    ...stages.design,
    ...stages.simulate,
  };
}

/**
 * The same from the files that the stages left.
 * @throws InputError when one of them is missing, damaged or stale.
 */
export function readResult(open: OpenStudy): StudyResult {
  return makeResult(open, {
    experiment: readStage(open, 'experiment'),
    fit: readStage(open, 'fit'),
    assess: readStage(open, 'assess'),
    design: readStage(open, 'design'),
    simulate: readStage(open, 'simulate'),
  });
}
