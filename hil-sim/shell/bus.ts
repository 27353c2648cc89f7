/** What the bench needs of a broker, whether it runs in this process or elsewhere. */

export type Handler = (topic: string, bytes: Uint8Array) => void;

export interface PublishOptions {
  readonly retain?: boolean;
}

export interface Bus {
  /** Address at which agents find the broker. */
  readonly url: string;
  publish(topic: string, bytes: Uint8Array, options?: PublishOptions): void;
  /** Takes every message on topics that match the filter. */
  subscribe(filter: string, handler: Handler): Promise<void>;
  close(): Promise<void>;
}

/** Quality of service of senses and steers: 0, or 1 where a broker is far and drops. */
export type Qos = 0 | 1;
