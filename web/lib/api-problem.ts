import type { Problem } from '../../shared/api/problem.js';

/** The server refused: problem details of RFC 9457, its further members kept in `problem`. */
export class ApiProblem extends Error {
  override readonly name = 'ApiProblem';
  readonly status: number;
  readonly type: string;
  readonly title: string;
  readonly detail: string | undefined;
  readonly remedy: string | undefined;
  /** JSON pointers into the request's body, a reason each. */
  readonly errors: readonly { pointer: string; reason: string }[];
  readonly problem: Problem;
  constructor(problem: Problem) {
    super(problem.detail ?? problem.title);
    this.status = problem.status;
    this.type = problem.type;
    this.title = problem.title;
    this.detail = problem.detail;
    this.remedy = problem.remedy;
    this.errors = problem.errors ?? [];
    this.problem = problem;
  }
}

/** Nobody answered, or what answered was not this program's server. */
export class UnreachableError extends Error {
  override readonly name = 'UnreachableError';
}
