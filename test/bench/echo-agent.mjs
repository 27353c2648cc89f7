/** The least that answers: for every message on its sense topic one fixed small message on its steer topic. */
import { connect } from 'mqtt';

const [url, vehicle] = process.argv.slice(2);
const steer = Buffer.from(JSON.stringify({ tick: 0, heading_deg: 123.456, speed_mps: 1.234, depth_m: 40.5, say: null }));
const client = connect(url, { protocolVersion: 4, reconnectPeriod: 0 });
client.on('connect', () => {
  client.stream.setNoDelay(true);
  client.subscribe(`drywake/bare/${vehicle}/sense`, () => { client.publish(`drywake/bare/${vehicle}/status`, 'ready'); });
});
client.on('message', () => { client.publish(`drywake/bare/${vehicle}/steer`, steer); });
client.on('close', () => { process.exit(0); });
