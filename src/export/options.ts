/** What a result does not say of itself. */
export interface ExportOptions {
  /** The study's short name: part of the header's name and of its symbols. */
  readonly name: string;
  /** Of this program. */
  readonly version: string;
}

/** Value of `format` in every controller file, and the version of its layout. */
export const CONTROLLER_FORMAT = 'liftwright-controller';
export const CONTROLLER_FORMAT_VERSION = 1;
