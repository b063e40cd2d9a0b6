import net from 'node:net';
import path from 'node:path';
import { readJson, writePrivateJson } from './paths.mjs';

function isFree(port) {
  return new Promise((resolve) => {
    const server = net.createServer();
    server.once('error', () => resolve(false));
    server.listen({ port, host: '127.0.0.1', exclusive: true }, () => server.close(() => resolve(true)));
  });
}

function anyFreePort() {
  return new Promise((resolve, reject) => {
    const server = net.createServer();
    server.once('error', reject);
    server.listen({ port: 0, host: '127.0.0.1' }, () => {
      const { port } = server.address();
      server.close(() => resolve(port));
    });
  });
}

/** A port for each name, the same as last time where it is still free. */
export async function choosePorts(state, names) {
  const file = path.join(state, 'ports.json');
  const before = readJson(file, {});
  const ports = {};
  for (const name of names) {
    const last = before[name];
    ports[name] = Number.isInteger(last) && (await isFree(last)) ? last : await anyFreePort();
  }
  writePrivateJson(file, { ...before, ...ports });
  return ports;
}

export { isFree };
