import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { arch, cpus, platform, release } from 'node:os';
import type { RunRecord } from './run-record.ts';

/** Name and version of this program, from its package file. */
export function toolVersion(): string {
  const text = readFileSync(new URL('../../package.json', import.meta.url), 'utf8');
  return (JSON.parse(text) as { version: string }).version;
}

/** The machine a run was timed on. Speeds are compared only within one `class`: same processor, cores, system, Node major. */
export function describeEnvironment(): RunRecord['environment'] {
  const cpu = cpus()[0]?.model.trim() ?? 'unknown';
  const cores = cpus().length;
  const os = `${platform()} ${release()} ${arch()}`;
  const parts = [cpu, String(cores), platform(), arch(), process.versions.node.split('.')[0]];
  return {
    node: process.versions.node,
    zlib: process.versions.zlib,
    cpu,
    cores,
    os,
    class: createHash('sha256').update(parts.join('|')).digest('hex').slice(0, 12),
  };
}
