import { useSignal } from '@preact/signals';
import { accessToken, giveToken, isTokenWanted } from '../state/access.ts';

/** Asks for an access token once the server wants one. */
export function TokenForm() {
  const token = useSignal('');
  if (!isTokenWanted.value) return null;
  const submit = (event: Event): void => {
    event.preventDefault();
    giveToken(token.value.trim());
    // What was refused is asked for again from the start.
    location.reload();
  };
  return (
    <form class="token-form notice tone-warn" onSubmit={submit}>
      <div>
        <label for="token">
          {accessToken.value === '' ? 'This server asks for an access token' : 'The access token was not accepted'}
        </label>
        <div class="field-row">
          <input
            id="token"
            type="password"
            required
            autocomplete="off"
            value={token.value}
            onInput={(event) => {
              token.value = event.currentTarget.value;
            }}
          />
          <button type="submit">Use it</button>
        </div>
        <p class="small">
          The keeper of the server makes one with “ratespan token add”. It stays in this tab and is forgotten when the
          tab is closed.
        </p>
      </div>
    </form>
  );
}
