/** What every report, review sheet and exported header says. */
export const STANDING_HAZARDS: readonly string[] = [
  'Results hold only for the model and the scenarios shown.',
  'Keep independent limits: end stops, current and pressure limits, emergency stop.',
  'Commission at reduced authority.',
  'Follow the applicable machinery-safety and functional-safety standards and local codes.',
  'A licensed or otherwise competent person signs off.',
];
