import 'uplot/dist/uPlot.min.css';
import { ReplaySubject } from 'rxjs';
import type { FeedRequest } from '../shared-types/feed.ts';
import { feed } from './feed.ts';
import { news$ } from './news.ts';
import { PAGES } from './pages.ts';
import { createNavigation, route } from './route.ts';
import { mountWatch } from './watch/page.ts';
import { stripPlaceAt } from './watch/place.ts';

const look$ = new ReplaySubject<FeedRequest>(1);
const navigation = createNavigation(PAGES);
const page = mountWatch(document.getElementById('page')!, navigation.root, (look) => look$.next({ look }));
const address = `${location.protocol === 'https:' ? 'wss' : 'ws'}://${location.host}/feed`;

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
feed(address, look$).subscribe((happening) => {
  if (happening.kind === 'message') page.receive(happening.message);
  else if (happening.kind === 'open') page.opened();
  else page.closed();
  news$.next(happening);
});
