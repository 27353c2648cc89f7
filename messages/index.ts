/** The public face of the contract, for shells and for types. */
export * from './codec.ts';
export * from './frame.ts';
export * from './memory.ts';
export * from './mission.ts';
export * from './normalise.ts';
export * from './pack.ts';
export * from './sea.ts';
export * from './sense.ts';
export * from './settings.ts';
export * from './shape.ts';
export * from './status.ts';
export * from './steer.ts';
export * from './topics.ts';
