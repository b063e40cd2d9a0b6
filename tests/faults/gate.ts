import { once } from 'node:events';
import net from 'node:net';

/**
 * A door in front of a service: while it is shut every connection is broken off and none is taken, as when the service
 * itself is gone; the service keeps what it holds.
 */
export class Gate {
  private server: net.Server | null = null;
  private readonly open = new Set<net.Socket>();

  private constructor(
    private readonly target: URL,
    private port: number,
  ) {}

  static async before(address: string): Promise<Gate> {
    const gate = new Gate(new URL(address), 0);
    await gate.back();
    return gate;
  }

  /** The service's address by way of this door. */
  get url(): string {
    const url = new URL(this.target);
    url.port = String(this.port);
    return url.toString().replace(/\/$/, '');
  }

  async away(): Promise<void> {
    const closing = this.server;
    this.server = null;
    for (const socket of this.open) socket.destroy();
    this.open.clear();
    if (!closing) return;
    closing.close();
    await once(closing, 'close');
  }

  async back(): Promise<void> {
    const server = net.createServer((inside) => {
      const outside = net.connect({ host: this.target.hostname, port: Number(this.target.port) });
      for (const [from, to] of [
        [inside, outside],
        [outside, inside],
      ]) {
        this.open.add(from);
        from.on('error', () => to.destroy());
        from.on('close', () => {
          this.open.delete(from);
          to.destroy();
        });
        from.pipe(to);
      }
    });
    server.listen(this.port, '127.0.0.1');
    await once(server, 'listening');
    this.port = (server.address() as net.AddressInfo).port;
    this.server = server;
  }
}
