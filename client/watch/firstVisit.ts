import { element, say } from '../dom.ts';
import type { PageState } from '../feedState.ts';

/** What the page says instead of strips: that it is connecting, or how to connect a first channel. */
export interface FirstVisit {
  root: HTMLElement;
  update(state: PageState): void;
}

/** Creates it. */
export function createFirstVisit(): FirstVisit {
  const root = element('section', 'firstVisit');
  let shown = '';
  return {
    root,
    update: (state) => {
      const now = !state.welcomed
        ? 'connecting'
        : state.channels.size === 0
          ? `empty ${state.ingestAddress}`
          : '';
      root.hidden = now === '';
      if (now === shown) return;
      shown = now;
      if (now === 'connecting')
        root.replaceChildren(element('p', 'quietLine', 'Connecting to Foreshift’s server…'));
      else if (now !== '') root.replaceChildren(...lines(state.ingestAddress));
    },
  };
}

function lines(address: string): Node[] {
  const step = (...parts: (Node | string)[]) => element('li', '', ...parts);
  const code = (text: string) => element('code', '', text);
  const title = element('h2', '', 'Nothing is connected yet.');
  const program = element('pre', '');
  say(program, producer(address));
  return [
    title,
    element(
      'ol',
      'steps',
      step(
        'Send a channel’s numbers to ',
        code(address),
        ', from any program that can open a WebSocket; ten lines do it, below.',
      ),
      step(
        'Or play a recording as if it were live: ',
        code(`npx foreshift play RECORDING.csv --to ${address}`),
      ),
      step(
        'Or see what it looks like first: ',
        code('npm start'),
        ' runs the demo, two simulated loops that reverse every half minute or so.',
      ),
    ),
    element(
      'p',
      'note',
      'Ten lines that put your own numbers on this page (save as producer.mjs in Foreshift’s folder, run with node producer.mjs):',
    ),
    program,
  ];
}

function producer(address: string): string {
  return `import WebSocket from 'ws';
const readSensor = () => Math.sin(Date.now() / 3000); // your instrument here
(function connect() {
  const socket = new WebSocket('${address}', 'foreshift.ingest.1');
  const frame = () => JSON.stringify({ channel: 'mine', dt: 0.1, values: [readSensor()] });
  const timer = setInterval(() => socket.readyState === 1 && socket.send(frame()), 100);
  socket.on('message', (reply) => console.log(String(reply))); // errors come in words
  socket.on('error', (error) => console.log(error.message));
  socket.on('close', () => clearInterval(timer) ?? setTimeout(connect, 1000));
})();`;
}
