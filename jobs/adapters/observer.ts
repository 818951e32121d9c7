import type { Observer } from '../ports/index.ts';

/** Upper bounds of the duration buckets, s. */
const BOUNDS_S = [0.005, 0.02, 0.1, 0.5, 2, 10, 60];

/** A count and a distribution of durations by labels. */
function createFamily(name: string, help: string, labels: readonly string[]) {
  const rows = new Map<string, { sum: number; count: number; buckets: number[] }>();
  return {
    add(values: readonly string[], durationMs: number): void {
      const key = labels.map((label, i) => `${label}="${values[i].replace(/["\\\n]/g, '_')}"`).join(',');
      let row = rows.get(key);
      if (!row) {
        row = { sum: 0, count: 0, buckets: BOUNDS_S.map(() => 0) };
        rows.set(key, row);
      }
      const seconds = durationMs / 1000;
      row.sum += seconds;
      row.count++;
      for (const [i, bound] of BOUNDS_S.entries()) if (seconds <= bound) row.buckets[i]++;
    },
    text(): string {
      let out = `# TYPE ${name}_seconds histogram\n# UNIT ${name}_seconds seconds\n# HELP ${name}_seconds ${help}\n`;
      for (const [key, { sum, count, buckets }] of rows) {
        for (const [i, bound] of BOUNDS_S.entries())
          out += `${name}_seconds_bucket{${key},le="${bound}"} ${buckets[i]}\n`;
        out += `${name}_seconds_bucket{${key},le="+Inf"} ${count}\n`;
        out += `${name}_seconds_count{${key}} ${count}\n${name}_seconds_sum{${key}} ${sum.toFixed(6)}\n`;
      }
      return out;
    },
  };
}

const textOf = (error: unknown) => (error instanceof Error ? (error.stack ?? error.message) : String(error));

/**
 * Writes one JSON object a line and counts. No label and no line names a lab; labels name no campaign and no sample either,
 * so that their number stays small. @param quiet only what went wrong is written
 */
export function createObserver(write: (line: string) => void, quiet = false): Observer {
  const requests = createFamily('ratespan_http_request', 'Answered requests.', ['method', 'route', 'status']);
  const jobs = createFamily('ratespan_job', 'Attempts at jobs.', ['step', 'end']);
  let troubles = 0;
  const line = (level: 'info' | 'warn' | 'error', event: string, fields: object) =>
    write(JSON.stringify({ time: new Date().toISOString(), level, event, ...fields }));
  return {
    request({ requestId, method, route, status, durationMs, tokenId }) {
      requests.add([method, route, String(status)], durationMs);
      if (quiet && status < 500) return;
      const fields = { request_id: requestId, method, route, status, duration_ms: Math.round(durationMs * 10) / 10 };
      line(status >= 500 ? 'error' : 'info', 'request', { ...fields, ...(tokenId && { token_id: tokenId }) });
    },
    job({ jobId, campaignId, step, attempt, end, durationMs, error }) {
      jobs.add([step, end], durationMs);
      if (quiet && end === 'done') return;
      const ids = { job_id: jobId, campaign_id: campaignId, step, attempt, end };
      line(end === 'done' ? 'info' : 'warn', 'job', {
        ...ids,
        duration_ms: Math.round(durationMs),
        ...(error && { error }),
      });
    },
    trouble(what, error, ids = {}) {
      troubles++;
      line('error', 'trouble', { what, ...ids, error: textOf(error) });
    },
    figures: () =>
      `${requests.text()}${jobs.text()}# TYPE ratespan_troubles counter\n# HELP ratespan_troubles Failures that are ours or the operator's to look at.\nratespan_troubles_total ${troubles}\n`,
  };
}
