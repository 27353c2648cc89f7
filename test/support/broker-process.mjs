/** A broker in a process of its own, for tests of `--broker`: prints its port, ends with its standard input. */
import { createServer } from 'node:net';
import { Aedes } from 'aedes';

const aedes = await Aedes.createBroker();
const server = createServer({ noDelay: true }, aedes.handle);
server.listen(0, '127.0.0.1', () => { process.stdout.write(`${server.address().port}\n`); });
process.stdin.resume().once('end', () => { process.exit(0); });
