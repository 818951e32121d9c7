import type { SampleState } from '../../schema/wire/states.ts';

/** A vessel that fills as the work on a sample goes on; a stroke through it when it cannot. */
const LEVELS: Record<SampleState, number> = {
  waiting: 0,
  queued: 0.35,
  fitting: 0.65,
  stale: 0.65,
  fitted: 1,
  insufficient: 0,
  failed: 0,
};

export function StateGlyph({ state }: { state: SampleState }) {
  const height = 10 * LEVELS[state];
  const isStopped = state === 'insufficient' || state === 'failed';
  return (
    <svg class={`state-glyph state-${state}`} width="14" height="16" viewBox="0 0 14 16" aria-hidden="true">
      <path class="glyph-line" d="M2.500 1.500v10.500a2 2 0 0 0 2 2h5a2 2 0 0 0 2-2v-10.500" />
      {height > 0 && <rect class="glyph-fill" x="4.200" width="5.600" y={12.3 - height} height={height} rx="0.800" />}
      {isStopped && <path class="glyph-line" d="M1 14.500 13 1.500" />}
    </svg>
  );
}

/** Sign of a severity: shape and colour. */
export function SeverityGlyph({ severity }: { severity: 'stop' | 'warn' | 'note' | 'gap' }) {
  return (
    <svg class={`severity-glyph tone-${severity}`} width="18" height="18" viewBox="0 0 18 18" aria-hidden="true">
      {severity === 'stop' && (
        <>
          <path class="glyph-solid" d="M5.700 1h6.600L17 5.700v6.600L12.300 17H5.700L1 12.300V5.700z" />
          <path class="glyph-cut" d="M5 9h8" />
        </>
      )}
      {severity === 'warn' && (
        <>
          <path class="glyph-solid" d="M9 1.300 17.500 16.500H.500z" />
          <path class="glyph-cut" d="M9 6.500v5M9 13.400v1.200" />
        </>
      )}
      {severity === 'note' && (
        <>
          <circle class="glyph-line" cx="9" cy="9" r="7.200" />
          <path class="glyph-line" d="M9 8v5M9 5v1.300" />
        </>
      )}
      {severity === 'gap' && <path class="glyph-line" d="M2 4v10M16 4v10M4.500 9h1.500M8.250 9h1.500M12 9h1.500" />}
    </svg>
  );
}
