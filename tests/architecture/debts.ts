/** Imports against the rules that are known and dated. The only exception there is; empty is the aim. */
export interface Debt {
  from: string;
  to: string;
  since: string;
  why: string;
}

export const debts: readonly Debt[] = [];
