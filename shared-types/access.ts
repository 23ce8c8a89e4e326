/**
 * What somebody may do: an operator everything but feed, a viewer look, a producer feed its channels and nothing else.
 */
export type Role = 'operator' | 'viewer' | 'producer';

/** `GET /access`: whether this server asks for tokens, and who the page is. */
export interface WhoAmI {
  /** false: only this machine can connect, and it may do everything */
  tokens: boolean;
  /** null: not signed in */
  role: 'operator' | 'viewer' | null;
  /** the token's name; null where there is none */
  name: string | null;
}
