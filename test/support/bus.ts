/** A bus within the test: everything published is kept, and handlers hear it at once. */
import type { Bus, Handler } from '../../hil-sim/shell/bus.ts';

export interface TestBus extends Bus {
  readonly published: { readonly topic: string; readonly text: string; readonly retain: boolean }[];
  /** Says something as somebody else would. */
  say(topic: string, message: unknown): void;
}

export function testBus(): TestBus {
  const handlers: { readonly pattern: RegExp; readonly handler: Handler }[] = [];
  const published: TestBus['published'] = [];
  const tell = (topic: string, bytes: Uint8Array): void => {
    for (const { pattern, handler } of handlers) if (pattern.test(topic)) handler(topic, bytes);
  };
  return {
    url: 'mqtt://127.0.0.1:1',
    published,
    publish(topic, bytes, { retain = false } = {}) {
      published.push({ topic, text: Buffer.from(bytes).toString(), retain });
      tell(topic, bytes);
    },
    subscribe(filter, handler) {
      handlers.push({ pattern: new RegExp(`^${filter.replaceAll('+', '[^/]+')}$`), handler });
      return Promise.resolve();
    },
    close: () => Promise.resolve(),
    say(topic, message) {
      tell(topic, message instanceof Uint8Array ? message : Buffer.from(JSON.stringify(message)));
    },
  };
}
