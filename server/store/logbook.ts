import type { Database, Statement } from 'better-sqlite3';

/** Where a line of the logbook is kept. */
export type LogbookSource = 'log' | 'switch' | 'warning';

/** A line as kept: `json` is a LogEntry, a SwitchEvent or a Warning whose own id may be stale. */
export interface LogbookRow {
  source: LogbookSource;
  id: number;
  /** what lines are ordered by: channel time, or the server's clock where that is elapsed time or there is none */
  time: number;
  json: string;
}

/** Which lines are asked for; what is left out does not restrict. */
export interface LogbookQuery {
  /** 'warning', 'switch' and kinds of the log */
  kinds?: string[];
  /** lines of this channel; those of the log that name none belong to it when they are of one of `watchesOfChannel` */
  channel?: string;
  watchesOfChannel?: string[];
  watch?: string;
  /** from ≤ time ≤ to */
  from?: number;
  to?: number;
  /** only lines after this one in the order asked for */
  after?: Pick<LogbookRow, 'source' | 'id' | 'time'>;
  /** these lines alone, `source id` each */
  keys?: string[];
  oldestFirst?: boolean;
  most: number;
}

const SOURCES: readonly LogbookSource[] = ['log', 'switch', 'warning'];
const TABLES = { log: 'log', switch: 'switches', warning: 'warnings' };

/** Elapsed time (below 1e8) has no place among times of day: the server's clock stands in where it was noted. */
const TIMES = {
  log: "json_extract(json, '$.time')",
  switch: "CASE WHEN at >= 1e8 THEN at ELSE coalesce(json_extract(json, '$.loggedAt'), at) END",
  warning: "CASE WHEN at >= 1e8 THEN at ELSE coalesce(json_extract(json, '$.madeAt'), at) END",
};

/**
 * The lines of the log, the switches and the warnings in one order of time, over an open, migrated database.
 *
 * The indexes it makes are no part of the database's version: a program that has none reads the same lines.
 */
export function createLogbook(database: Database): (query: LogbookQuery) => LogbookRow[] {
  makeIndexes(database);
  const statements = new Map<string, Statement>();
  return (query) => {
    const sql = unionOf(query);
    if (sql === null) return [];
    let statement = statements.get(sql);
    if (statement === undefined) statements.set(sql, (statement = database.prepare(sql)));
    return statement.all(parametersOf(query)) as LogbookRow[];
  };
}

function makeIndexes(database: Database): void {
  try {
    for (const source of SOURCES)
      database.exec(
        `CREATE INDEX IF NOT EXISTS ${TABLES[source]}_by_time ON ${TABLES[source]} (${TIMES[source]}, id)`,
      );
  } catch (fault) {
    // a full disk must not keep a server from showing what it has: only slower
    if (!/full/i.test((fault as Error).message)) throw fault;
  }
}

function unionOf(query: LogbookQuery): string | null {
  const parts = SOURCES.filter((source) => wants(query, source)).map((source) => partOf(query, source));
  if (parts.length === 0) return null;
  const way = query.oldestFirst ? 'ASC' : 'DESC';
  return `SELECT * FROM (${parts.join(' UNION ALL ')}) ORDER BY time ${way}, source ${way}, id ${way} LIMIT @most`;
}

function wants({ kinds, keys }: LogbookQuery, source: LogbookSource): boolean {
  if (keys !== undefined && !keys.some((key) => key.startsWith(`${source} `))) return false;
  if (kinds === undefined) return true;
  return source === 'log'
    ? kinds.some((kind) => kind !== 'warning' && kind !== 'switch')
    : kinds.includes(source);
}

function partOf(query: LogbookQuery, source: LogbookSource): string {
  const time = TIMES[source];
  const way = query.oldestFirst ? 'ASC' : 'DESC';
  const conditions = conditionsOf(query, source, time);
  const where = conditions.length === 0 ? '' : `WHERE ${conditions.join(' AND ')}`;
  return (
    `SELECT * FROM (SELECT '${source}' AS source, id, ${time} AS time, json FROM ${TABLES[source]} ${where} ` +
    `ORDER BY ${time} ${way}, id ${way} LIMIT @most)`
  );
}

function conditionsOf(query: LogbookQuery, source: LogbookSource, time: string): string[] {
  const conditions: string[] = [];
  if (query.from !== undefined) conditions.push(`${time} >= @from`);
  if (query.to !== undefined) conditions.push(`${time} <= @to`);
  if (query.after !== undefined) {
    const side = query.oldestFirst ? '>' : '<';
    // the first alone would do for the answer, the second alone lets the index find the place
    conditions.push(`(${time}, '${source}', id) ${side} (@afterTime, @afterSource, @afterId)`);
    conditions.push(`${time} ${side}= @afterTime`);
  }
  if (query.keys !== undefined) conditions.push(`id IN (SELECT value FROM json_each(@${source}Ids))`);
  if (query.watch !== undefined)
    conditions.push(source === 'log' ? "json_extract(json, '$.watch') = @watch" : 'watch = @watch');
  if (query.channel !== undefined)
    conditions.push(
      source === 'log'
        ? "(json_extract(json, '$.channel') = @channel OR (json_extract(json, '$.channel') IS NULL " +
            "AND json_extract(json, '$.watch') IN (SELECT value FROM json_each(@watchesOfChannel))))"
        : 'EXISTS (SELECT 1 FROM json_each(channels) WHERE value = @channel)',
    );
  if (query.kinds !== undefined && source === 'log')
    conditions.push("json_extract(json, '$.kind') IN (SELECT value FROM json_each(@kinds))");
  return conditions;
}

function parametersOf(query: LogbookQuery): Record<string, string | number> {
  const parameters: Record<string, string | number> = { most: query.most };
  if (query.from !== undefined) parameters.from = query.from;
  if (query.to !== undefined) parameters.to = query.to;
  if (query.watch !== undefined) parameters.watch = query.watch;
  if (query.channel !== undefined) {
    parameters.channel = query.channel;
    parameters.watchesOfChannel = JSON.stringify(query.watchesOfChannel ?? []);
  }
  if (query.kinds !== undefined) parameters.kinds = JSON.stringify(query.kinds);
  if (query.after !== undefined) {
    parameters.afterTime = query.after.time;
    parameters.afterSource = query.after.source;
    parameters.afterId = query.after.id;
  }
  if (query.keys !== undefined)
    for (const source of SOURCES)
      parameters[`${source}Ids`] = JSON.stringify(
        query.keys
          .filter((key) => key.startsWith(`${source} `))
          .map((key) => Number(key.slice(source.length + 1))),
      );
  return parameters;
}
