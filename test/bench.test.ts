import { spawnSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

/** A bench prints a heading; the other files of the folder serve them. */
const benches = readdirSync('test/bench').filter(
  (file) => file !== 'measure.mjs' && readFileSync(`test/bench/${file}`, 'utf8').includes('heading('),
);

describe('the benches', () => {
  it.each(benches)('%s runs at its smallest sizes and prints its figures', (file) => {
    const { status, stdout, stderr } = spawnSync(process.execPath, [`test/bench/${file}`, '--smoke'], {
      encoding: 'utf8',
    });
    expect({ status, stderr }).toEqual({ status: 0, stderr: '' });
    expect(stdout).toMatch(/Node v\d+/);
    expect(stdout).toMatch(/\d\.\d/);
    expect(stdout).not.toMatch(/NaN/);
  });
});
