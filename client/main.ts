import 'uplot/dist/uPlot.min.css';
import { merge, ReplaySubject, Subject } from 'rxjs';
import type { TrialSeen } from '../shared-types/delivery.ts';
import type { FeedRequest } from '../shared-types/feed.ts';
import { leaveIfOut, signedIn } from './access/signedIn.ts';
import { enter } from './access/signIn.ts';
import { feed } from './feed.ts';
import { news$ } from './news.ts';
import { PAGES } from './pages.ts';
import { createNavigation, route } from './route.ts';
import { mountWatch } from './watch/page.ts';
import { stripPlaceAt } from './watch/place.ts';

const host = document.getElementById('page')!;
const who = await enter(host);
const signedInLine = signedIn(who);
const look$ = new ReplaySubject<FeedRequest>(1);
const echo$ = new Subject<TrialSeen>();
const navigation = createNavigation(PAGES);
const page = mountWatch(
  host,
  navigation.root,
  (look) => look$.next({ look }),
  (seen) => echo$.next(seen),
);
const address = `${location.protocol === 'https:' ? 'wss' : 'ws'}://${location.host}/feed`;

if (signedInLine !== null) {
  // what explains itself stands above what it stops, the rest below
  if (who.role === 'viewer') page.body.before(signedInLine);
  else page.body.after(signedInLine);
}
route(PAGES, page.body, (shown) => {
  navigation.here(shown);
  page.called(shown.name);
});
const lookAtPlace = () => {
  const place = stripPlaceAt(location.hash);
  if (place !== null) page.lookAt(place);
};
addEventListener('hashchange', lookAtPlace);
lookAtPlace();
feed(address, merge(look$, echo$)).subscribe((happening) => {
  if (happening.kind === 'message') page.receive(happening.message);
  else if (happening.kind === 'open') page.opened();
  else {
    page.closed();
    void leaveIfOut();
  }
  news$.next(happening);
});
