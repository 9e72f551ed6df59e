/**
 * Loaded before a program (`node --import`), makes every connection and name look-up that would leave the machine fail
 * loudly: the program under test ends with status 97.
 */
import dgram from 'node:dgram';
import dns from 'node:dns';
import net from 'node:net';
import { syncBuiltinESMExports } from 'node:module';

const STATUS = 97;
const LOOPBACK = new Set(['127.0.0.1', '::1', 'localhost']);

function refuse(what) {
  process.stderr.write(`network refused: ${what}\n`);
  process.exit(STATUS);
}

const connect = Reflect.get(net.Socket.prototype, 'connect');
net.Socket.prototype.connect = function (...args) {
  const [first] = Array.isArray(args[0]) ? args[0] : args;
  const options = typeof first === 'object' && first !== null ? first : { port: first, host: args[1] };
  const local = options.path !== undefined || LOOPBACK.has(options.host ?? 'localhost');
  if (!local) refuse(`connection to ${options.host}:${options.port}`);
  return Reflect.apply(connect, this, args);
};

for (const module of [dns, dns.promises]) {
  for (const name of ['lookup', 'resolve', 'resolve4', 'resolve6']) {
    const original = module[name];
    module[name] = function (host, ...rest) {
      if (!LOOPBACK.has(host)) refuse(`look-up of ${host}`);
      return Reflect.apply(original, this, [host, ...rest]);
    };
  }
}

dgram.createSocket = () => refuse('a datagram socket');
syncBuiltinESMExports();
