/** Tells how far the job is, on stderr, only where that is a terminal; and how long each part took. */
export interface Progress {
  /** Runs one part of the job under its name; `onShare` takes the share that is done, 0 … 1. */
  readonly during: <T>(name: string, part: (onShare: (share: number) => void) => T) => Promise<T>;
  /** Seconds by part, in the order in which they were done. */
  readonly timings: ReadonlyMap<string, number>;
}

/** Milliseconds between two redraws of the line. */
const REDRAW = 80;

export function createProgress(wanted: boolean): Progress {
  const shown = wanted && process.stderr.isTTY === true;
  const timings = new Map<string, number>();
  const draw = (text: string) => {
    if (shown) process.stderr.write(`\r\x1b[K${text}`);
  };
  return {
    timings,
    during: async (name, part) => {
      const start = performance.now();
      let drawn = Number.NEGATIVE_INFINITY;
      draw(`${name} …`);
      try {
        return await part((share) => {
          const now = performance.now();
          if (now - drawn < REDRAW) return;
          drawn = now;
          draw(`${name} … ${Math.round(100 * Math.min(1, Math.max(0, share)))} %`);
        });
      } finally {
        timings.set(name, (performance.now() - start) / 1000);
        draw('');
      }
    },
  };
}
