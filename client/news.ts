import { Subject } from 'rxjs';
import type { FeedHappening } from './feed.ts';

/** What comes over the feed, for the pages that are mounted when somebody first visits them. */
export const news$ = new Subject<FeedHappening>();
