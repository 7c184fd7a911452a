import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { parse } from 'csv-parse/sync';
import { describe, expect, test } from 'vitest';
import { generateDemo, listHashes } from '../corpora-demo/generate.mjs';

const folder = new URL('../corpora-demo/', import.meta.url);
const names = ['telemetry.bin', 'events.log', 'alerts.ndjson', 'positions.csv'];
const committed = (name: string) => readFileSync(new URL(name, folder));
const made = generateDemo();

/** The lines of a text file, without the newline that ends each. */
function linesOf(name: string): string[] {
  const text = committed(name).toString('latin1');
  expect(text.endsWith('\n')).toBe(true);
  return text.slice(0, -1).split('\n');
}

describe('the demo data', () => {
  test('holds the four files and no more', () => {
    expect([...made.keys()]).toEqual(names);
  });

  test.each(names)('%s is what the generator makes, byte by byte', (name) => {
    expect(Buffer.compare(Buffer.from(made.get(name)!), committed(name))).toBe(0);
  });

  test('has the committed SHA-256 hashes', () => {
    const list = committed('sha256.txt').toString('latin1');
    expect(listHashes(made)).toBe(list);
    const rows = list.trimEnd().split('\n');
    expect(rows.map((row) => row.slice(66))).toEqual(names);
    for (const row of rows) {
      const [hash, name] = row.split('  ') as [string, string];
      expect(createHash('sha256').update(committed(name)).digest('hex')).toBe(hash);
    }
  });

  test('comes out the same when made again', () => {
    expect(listHashes(generateDemo())).toBe(listHashes(made));
  });

  test('is made with exact arithmetic only', () => {
    const source = committed('generate.mjs').toString('latin1');
    const used = new Set([...source.matchAll(/\bMath\.(\w+)\(/g)].map((match) => match[1]));
    expect([...used].sort()).toEqual(['abs', 'floor', 'max', 'min']);
    expect(source).not.toMatch(/ \*\* |Date\.now|new Date\(\)|toFixed|toLocale/);
  });

  test('is under a megabyte', () => {
    const total = names.reduce((sum, name) => sum + committed(name).length, 0);
    expect(total).toBeLessThan(1_000_000);
  });

  test('is plain ASCII text where it is text', () => {
    for (const name of names.slice(1)) {
      expect(committed(name).every((byte) => byte === 10 || (byte >= 32 && byte < 127))).toBe(true);
    }
  });
});

describe('telemetry.bin', () => {
  const bytes = committed('telemetry.bin');
  const records = Array.from({ length: bytes.length / 24 }, (_, i) => bytes.subarray(i * 24));

  test('is whole records of 24 bytes', () => {
    expect(bytes.length % 24).toBe(0);
    expect(records.length).toBe(10_000);
  });

  test('keeps every field in its physical range', () => {
    for (const record of records) {
      for (const at of [2, 4, 6, 16, 18]) {
        expect(Math.abs(record.readInt16LE(at))).toBeLessThan(4000);
      }
      expect(record.readUInt16LE(8)).toBeLessThanOrEqual(1000);
      expect(record.readUInt8(10)).toBeLessThan(128);
    }
  });

  test('counts reports, lost ones too, and begins again after each restart', () => {
    let lost = 0;
    let restarts = 0;
    for (let i = 1; i < records.length; i++) {
      const [before, now] = [records[i - 1]!, records[i]!];
      const step = now.readUInt16LE(20) - before.readUInt16LE(20);
      if (now.readUInt8(22) === before.readUInt8(22)) {
        expect(step).toBeGreaterThan(0);
        lost += step - 1;
        // A report each ten minutes, each up to a minute late. Right after a restart the clock ran for less.
        const early = before.readUInt16LE(20) === 0 ? 600 : 60;
        expect(now.readUInt16LE(0)).toBeGreaterThanOrEqual(step * 600 - early);
        expect(now.readUInt16LE(0)).toBeLessThanOrEqual(step * 600 + 60);
      } else if (now.readUInt8(22) === before.readUInt8(22) + 1) {
        restarts += 1;
      }
    }
    expect(lost).toBeGreaterThan(50);
    expect(restarts).toBeGreaterThan(3);
  });
});

describe('the text files', () => {
  test('events.log has short lines in the order of time', () => {
    const lines = linesOf('events.log');
    expect(lines.length).toBeGreaterThan(3000);
    let last = 0;
    for (const line of lines) {
      expect(line).toMatch(/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ (INF|WRN|ALM) \d{3} \S.*\S$/);
      expect(line.length).toBeLessThanOrEqual(90);
      const time = Date.parse(line.slice(0, 20));
      expect(time).toBeGreaterThanOrEqual(last);
      last = time;
    }
  });

  test('alerts.ndjson parses line by line, with fixed keys', () => {
    const lines = linesOf('alerts.ndjson');
    expect(lines.length).toBeGreaterThan(2000);
    let last = 0;
    for (const line of lines) {
      const alert = JSON.parse(line) as Record<string, unknown>;
      expect(Object.keys(alert)).toEqual(['t', 'slot', 'code', 'sev', 'val', 'lim', 'open']);
      expect(line.length).toBeGreaterThanOrEqual(60);
      expect(line.length).toBeLessThanOrEqual(110);
      expect(alert['t']).toBeGreaterThanOrEqual(last);
      last = alert['t'] as number;
    }
  });

  test('positions.csv has five columns in every row', () => {
    const [header, ...rows] = parse(committed('positions.csv')) as string[][];
    expect(header).toEqual(['time', 'lat', 'lon', 'speed_knots', 'course']);
    expect(rows.length).toBe(5000);
    for (const row of rows) {
      expect(row.length).toBe(5);
      const [, lat, lon, speed, course] = row.map(Number) as number[];
      expect(Math.abs(lat!)).toBeLessThan(90);
      expect(Math.abs(lon!)).toBeLessThan(180);
      expect(speed).toBeGreaterThanOrEqual(0);
      expect(speed).toBeLessThan(30);
      expect(course).toBeGreaterThanOrEqual(0);
      expect(course).toBeLessThan(360);
    }
  });

  test.each(['events.log', 'alerts.ndjson'])(
    'no byte of %s turns up only in the later half',
    (name) => {
      const lines = linesOf(name);
      const half = Math.floor(lines.length / 2);
      const early = new Set(lines.slice(0, half).join(''));
      expect([...new Set(lines.slice(half).join(''))].filter((byte) => !early.has(byte))).toEqual(
        [],
      );
    },
  );
});
