/** Names of MQTT topics, built and taken apart here and nowhere else. */

const ROOT = 'drywake';
const NAME = /^[a-z0-9][a-z0-9_-]{0,63}$/;

export const VEHICLE_TOPICS = ['mission', 'sense', 'steer', 'status', 'orders'] as const;
export const SEA_TOPICS = ['tick', 'truth', 'faults', 'outcome', 'ask', 'answer'] as const;
export type VehicleTopic = (typeof VEHICLE_TOPICS)[number];
export type SeaTopic = (typeof SEA_TOPICS)[number];

/** Whether a text may stand as the name of a bench: lower-case letters, digits, `-`, `_`; 64 at most. */
export function isBenchName(text: string): boolean {
  return NAME.test(text);
}

/** The nearest allowed bench name to any text, e.g. a file's name. */
export function benchNameFrom(text: string): string {
  const plain = text.toLowerCase().replace(/[^a-z0-9_-]+/g, '-').replace(/^[^a-z0-9]+/, '').slice(0, 64);
  return plain === '' ? 'bench' : plain;
}

/** `drywake/<bench>/<vehicle>/<what>`. */
export function vehicleTopic(bench: string, vehicle: string, what: VehicleTopic): string {
  return `${ROOT}/${bench}/${vehicle}/${what}`;
}

/** `drywake/<bench>/sea/<what>`. */
export function seaTopic(bench: string, what: SeaTopic): string {
  return `${ROOT}/${bench}/sea/${what}`;
}

/** The filter that takes one kind of topic of every vehicle. */
export function everyVehicle(bench: string, what: VehicleTopic): string {
  return `${ROOT}/${bench}/+/${what}`;
}

export type TopicReading =
  | { readonly of: 'vehicle'; readonly bench: string; readonly vehicle: string; readonly what: VehicleTopic }
  | { readonly of: 'sea'; readonly bench: string; readonly what: SeaTopic };

/** Takes a topic apart, or answers null if it is none of ours. */
export function readTopic(topic: string): TopicReading | null {
  const [root, bench, who, what, ...more] = topic.split('/');
  if (root !== ROOT || bench === undefined || who === undefined || more.length > 0) return null;
  if (!isBenchName(bench) || !NAME.test(who)) return null;
  if (who === 'sea') {
    const found = SEA_TOPICS.find((known) => known === what);
    return found === undefined ? null : { of: 'sea', bench, what: found };
  }
  const found = VEHICLE_TOPICS.find((known) => known === what);
  return found === undefined ? null : { of: 'vehicle', bench, vehicle: who, what: found };
}
