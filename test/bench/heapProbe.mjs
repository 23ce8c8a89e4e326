// Preloaded into the server by soak.mjs: answers over IPC what its heap holds after a collection, and its memory.
import { isMainThread } from 'node:worker_threads';

if (isMainThread && process.send) {
  process.on('message', (message) => {
    if (message !== 'memory?') return;
    globalThis.gc();
    const { heapUsed, external, arrayBuffers, rss } = process.memoryUsage();
    process.send({ heapUsed, external, arrayBuffers, rss });
  });
  process.channel.unref();
}
