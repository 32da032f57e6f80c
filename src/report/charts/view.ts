/** How a description is to be drawn: what differs between a PNG, a wide page, a phone, a dark page and a print. */
export interface ChartView {
  /** Logical pixels. */
  readonly width: number;
  /** The sentence on top is drawn too; a page writes it as text instead. */
  readonly title: boolean;
  readonly fontFamily: string;
  /** Exchange of colours by their light form; empty on white. */
  readonly colours: Readonly<Record<string, string>>;
  readonly paper: string;
  readonly ink: string;
  readonly quiet: string;
  readonly grid: string;
  readonly responsive: boolean;
  readonly ratio: number;
  readonly text: {
    readonly title: number;
    readonly axis: number;
    readonly tick: number;
    readonly label: number;
  };
}
