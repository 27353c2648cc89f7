/**
 * The digest of a run: SHA-256, lower-case hex, over tick by tick, vehicle in fleet order, sense then
 * steer, each in its packed form; a vehicle whose agent is down adds nothing. A promise for one Node
 * version, since sin, cos and their kin may
 * differ in the last bit between versions.
 */
import { createHash } from 'node:crypto';
import { packSense, packSteer, startPacker } from '../../messages/pack.ts';
import type { Sense } from '../../messages/sense.ts';
import type { Steer } from '../../messages/steer.ts';

export interface Digest {
  take(senses: readonly (Sense | null)[], steers: readonly (Steer | null)[]): void;
  /** The digest so far; taking on afterwards is allowed. */
  hex(): string;
}

/** Hashing in larger pieces costs less than a call per message. */
const BATCH_BYTES = 64 * 1024;

export function startDigest(): Digest {
  const hash = createHash('sha256');
  const packer = startPacker();
  const batch = Buffer.alloc(2 * BATCH_BYTES);
  let filled = 0;
  const add = (): void => {
    batch.set(packer.bytes.subarray(0, packer.length), filled);
    filled += packer.length;
    if (filled >= BATCH_BYTES) {
      hash.update(batch.subarray(0, filled));
      filled = 0;
    }
  };
  return {
    take(senses, steers) {
      for (let index = 0; index < senses.length; index++) {
        const sense = senses[index] ?? null;
        const steer = steers[index] ?? null;
        if (sense === null || steer === null) continue;
        packSense(packer, sense);
        add();
        packSteer(packer, steer);
        add();
      }
    },
    hex() {
      hash.update(batch.subarray(0, filled));
      filled = 0;
      return hash.copy().digest('hex');
    },
  };
}
