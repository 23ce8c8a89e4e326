import { type AddressInfo, createServer, connect as dial, type Socket } from 'node:net';

/** A wire between a client and a server that can go dead without either being told. */
export interface Relay {
  port: number;
  /** from now on nothing passes and nothing is closed, as when a cable is pulled */
  cut(): void;
  close(): Promise<void>;
}

/** A relay of TCP connections to a port of this machine. */
export async function createRelay(target: number): Promise<Relay> {
  const sockets = new Set<Socket>();
  let dead = false;
  const pass = (from: Socket, to: Socket) => {
    sockets.add(from);
    from.on('data', (data) => {
      if (!dead) to.write(data);
    });
    from.on('close', () => {
      sockets.delete(from);
      if (!dead) to.destroy();
    });
    from.on('error', () => {});
  };
  const server = createServer((client) => {
    const out = dial(target, '127.0.0.1');
    pass(client, out);
    pass(out, client);
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  return {
    port: (server.address() as AddressInfo).port,
    cut: () => {
      dead = true;
    },
    close: () =>
      new Promise((resolve) => {
        for (const socket of sockets) socket.destroy();
        server.close(() => resolve());
      }),
  };
}
