/** What the environment says of servers, for the help of commands that run one or work for one. */
export const addressHelp = `
By environment only, since they may hold passwords:
  DATABASE_URL   the PostgreSQL server of the record: postgres://user@host/database
  REDIS_URL      the Redis server of the queue; without it the queue is in PostgreSQL
  DATABASE_URL_FILE, REDIS_URL_FILE   files that hold these addresses instead`;
