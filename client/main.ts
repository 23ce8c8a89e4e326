import 'uplot/dist/uPlot.min.css';
import { ReplaySubject } from 'rxjs';
import type { FeedRequest } from '../shared-types/feed.ts';
import { feed } from './feed.ts';
import { mountWatch } from './watch/page.ts';

const look$ = new ReplaySubject<FeedRequest>(1);
const page = mountWatch(document.getElementById('page')!, (look) => look$.next({ look }));
const address = `${location.protocol === 'https:' ? 'wss' : 'ws'}://${location.host}/feed`;

feed(address, look$).subscribe((happening) => {
  if (happening.kind === 'message') page.receive(happening.message);
  else if (happening.kind === 'open') page.opened();
  else page.closed();
});
