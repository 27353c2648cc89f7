import { describe, expect, it } from 'vitest';
import { AGENT_STATES } from '../../../messages/frame.ts';
import { moveOn, type Event } from '../../../onboard/core/states.ts';

const EVENTS: readonly Event[] = [
  'order-surface', 'order-home', 'order-hold', 'battery-low', 'ready', 'in-place', 'off-the-loop',
  'place-taken', 'arrived',
];

/** DESIGN parts 1 and 2 name states and orders; every other pair changes nothing. */
const MOVES = [
  ['waiting', 'ready', 'joining'], ['waiting', 'order-home', 'homing'], ['waiting', 'order-surface', 'surfacing'],
  ['waiting', 'battery-low', 'homing'],
  ['joining', 'in-place', 'holding'], ['joining', 'order-home', 'homing'], ['joining', 'order-surface', 'surfacing'],
  ['joining', 'battery-low', 'homing'],
  ['holding', 'off-the-loop', 'joining'], ['holding', 'place-taken', 'joining'], ['holding', 'order-home', 'homing'],
  ['holding', 'order-surface', 'surfacing'], ['holding', 'battery-low', 'homing'],
  ['homing', 'arrived', 'surfacing'], ['homing', 'order-hold', 'joining'], ['homing', 'order-surface', 'surfacing'],
  ['surfacing', 'order-hold', 'joining'], ['surfacing', 'order-home', 'homing'],
] as const;

describe('the states of an agent', () => {
  it.each(MOVES)('from %s on %s lead to %s', (from, event, to) => {
    expect(moveOn(from, event)?.to).toBe(to);
  });

  it('change on nothing else', () => {
    const named = new Set(MOVES.map(([from, event]) => `${from} ${event}`));
    const others = AGENT_STATES.flatMap((from) => EVENTS.map((event) => [from, event] as const))
      .filter(([from, event]) => !named.has(`${from} ${event}`));
    expect(others.length).toBe(AGENT_STATES.length * EVENTS.length - MOVES.length);
    for (const [from, event] of others) expect(moveOn(from, event)).toBeNull();
  });
});
