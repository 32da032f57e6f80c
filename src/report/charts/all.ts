import type { StudyResult } from '../../findings/studyResult.ts';
import type { ChartSpec } from '../spec.ts';
import { closedLoopChart } from './closedLoop.ts';
import { coverageCharts } from './coverage.ts';
import { excitationChart } from './excitation.ts';
import { rivalsChart } from './rivals.ts';
import { solverChart } from './solver.ts';
import { spectrumChart } from './spectrum.ts';
import { trustChart } from './trust.ts';

/** All charts of a study in the order of the report. */
export function describeCharts(result: StudyResult): ChartSpec[] {
  return [
    trustChart(result),
    closedLoopChart(result),
    rivalsChart(result),
    excitationChart(result),
    ...coverageCharts(result),
    spectrumChart(result),
    solverChart(result),
  ];
}
