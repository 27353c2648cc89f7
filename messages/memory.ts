/** How often an agent keeps its memory for a restart, in seconds of ticks from the start. */

export const CHECKPOINT_S = 600;
