import type { Identity } from './access.ts';

/** Least role of a route: anyone, signed in or not; a viewer or an operator; an operator. */
export type Rule = 'anyone' | 'viewer' | 'operator';

/**
 * Who may use which route, as the router writes them. What is not here is an operator's; a test holds this list
 * complete. Pages are files that anyone may fetch: there is nothing in them but the program.
 */
export const RULES: Readonly<Record<string, Rule>> = {
  'GET /': 'anyone',
  'GET /health': 'anyone',
  'GET /metrics': 'viewer',
  'GET /ingest': 'anyone',
  'GET /feed': 'anyone',
  'GET /access': 'anyone',
  'POST /access': 'anyone',
  'DELETE /access': 'anyone',
  'GET /api/channels': 'viewer',
  'GET /api/channels/:channel/columns': 'viewer',
  'GET /api/channels/:channel/samples.csv': 'viewer',
  'GET /api/watches': 'viewer',
  'POST /api/watches': 'operator',
  'POST /api/watches/:watch/actions': 'operator',
  'POST /api/watches/:watch/use': 'operator',
  'GET /api/watches/:watch/columns': 'viewer',
  'GET /api/watches/:watch/delay': 'viewer',
  'POST /api/watches/:watch/trials': 'operator',
  'GET /api/models': 'viewer',
  'POST /api/models': 'operator',
  'GET /api/models/:name': 'viewer',
  'GET /api/models/:name/evidence': 'viewer',
  'GET /api/warnings': 'viewer',
  'POST /api/warnings/:id/acted': 'operator',
  'GET /api/deliveries': 'viewer',
  'GET /api/switches': 'viewer',
  'GET /api/switches/:id/card': 'viewer',
  'GET /api/recordings': 'viewer',
  'GET /api/recordings/columns': 'viewer',
  'GET /api/log': 'viewer',
  'GET /api/log.csv': 'viewer',
  'GET /api/log.json': 'viewer',
  'GET /api/logbook': 'viewer',
  'GET /api/logbook/warnings': 'viewer',
  'POST /api/notes': 'operator',
  'GET /api/marks': 'viewer',
  'POST /api/marks': 'operator',
  'POST /api/marks/:id/end': 'operator',
  'DELETE /api/marks/:id': 'operator',
  'GET /api/conditions': 'viewer',
  'POST /api/conditions': 'operator',
  'DELETE /api/conditions': 'operator',
  'DELETE /api/conditions/:id': 'operator',
  'GET /api/rehearsals': 'viewer',
  'POST /api/rehearsals': 'operator',
  // these two change nothing: they answer about a recording
  'POST /api/rehearsals/preview': 'viewer',
  'POST /api/rehearsals/proposal': 'viewer',
  'GET /api/rehearsals/:id': 'viewer',
  'POST /api/rehearsals/:id/stop': 'operator',
  'GET /api/rehearsals/:id/result': 'viewer',
  'GET /api/rehearsals/:id/report.html': 'viewer',
  'GET /api/rehearsals/:id/columns': 'viewer',
  'GET /api/rehearsals/:id/cards/:index': 'viewer',
  'POST /api/rehearsals/:id/watch': 'operator',
  'GET /api/plays': 'viewer',
  'POST /api/plays': 'operator',
  'POST /api/plays/:id/stop': 'operator',
};

const patterns = Object.entries(RULES).map(([route, rule]) => {
  const [method, path] = route.split(' ') as [string, string];
  const parts = path.split('/').map((part) => (part.startsWith(':') ? '[^/]+' : part.replaceAll('.', '\\.')));
  return { method, pattern: new RegExp(`^${parts.join('/')}$`), rule };
});

/** The rule of a request. A literal route stands before one with a parameter in the router, and so it does here. */
export function ruleOf(method: string, path: string): Rule {
  const asked = method === 'HEAD' ? 'GET' : method;
  const fitting = patterns.filter((one) => one.method === asked && one.pattern.test(path));
  return (
    fitting.find(({ pattern }) => !pattern.source.includes('[^'))?.rule ?? fitting[0]?.rule ?? 'operator'
  );
}

/** Whether somebody may use a route with this rule. */
export function may(identity: Identity | null, rule: Rule): boolean {
  if (rule === 'anyone') return true;
  if (identity === null) return false;
  const { role } = identity;
  return role === 'everything' || role === 'operator' || (rule === 'viewer' && role === 'viewer');
}

/** Whether somebody may feed a channel. */
export function mayFeed({ role, channels }: Identity, channel: string): boolean {
  if (role === 'everything') return true;
  return role === 'producer' && (channels === null || channels.includes(channel));
}
