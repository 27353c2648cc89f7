/**
 * The five states of an agent as one table: from each state, which event leads where. An event that a
 * state's row does not name leaves it as it is.
 */
import type { AgentState } from '../../messages/frame.ts';
import type { Reason } from '../../messages/steer.ts';

/** What can happen to an agent, most urgent first. */
export type Event =
  | 'order-surface' | 'order-home' | 'order-hold' | 'battery-low'
  | 'ready' | 'in-place' | 'off-the-loop' | 'place-taken' | 'arrived';

interface Move {
  readonly to: AgentState;
  readonly reason: Reason;
}

const TABLE: Record<AgentState, Partial<Record<Event, Move>>> = {
  waiting: {
    'order-surface': { to: 'surfacing', reason: 'ordered' },
    'order-home': { to: 'homing', reason: 'ordered' },
    'battery-low': { to: 'homing', reason: 'battery-low' },
    ready: { to: 'joining', reason: 'start' },
  },
  joining: {
    'order-surface': { to: 'surfacing', reason: 'ordered' },
    'order-home': { to: 'homing', reason: 'ordered' },
    'battery-low': { to: 'homing', reason: 'battery-low' },
    'in-place': { to: 'holding', reason: 'on-the-loop' },
  },
  holding: {
    'order-surface': { to: 'surfacing', reason: 'ordered' },
    'order-home': { to: 'homing', reason: 'ordered' },
    'battery-low': { to: 'homing', reason: 'battery-low' },
    'off-the-loop': { to: 'joining', reason: 'off-the-loop' },
    'place-taken': { to: 'joining', reason: 'place-taken' },
  },
  homing: {
    'order-surface': { to: 'surfacing', reason: 'ordered' },
    'order-hold': { to: 'joining', reason: 'ordered' },
    arrived: { to: 'surfacing', reason: 'arrived' },
  },
  surfacing: {
    'order-home': { to: 'homing', reason: 'ordered' },
    'order-hold': { to: 'joining', reason: 'ordered' },
  },
};

/** Where an event leads from a state, or null if it changes nothing. */
export function moveOn(state: AgentState, event: Event): Move | null {
  return TABLE[state][event] ?? null;
}
