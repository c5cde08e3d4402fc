import type { ComponentChildren } from 'preact';
import type { Trouble } from '../server/answer.js';

/** Something is on its way. */
export function Loading({ what }: { readonly what: string }) {
  return (
    <p class="loading" role="status">
      Loading {what} ...
    </p>
  );
}

/** There is nothing here, and what to do about it. */
export function Empty({ children }: { readonly children: ComponentChildren }) {
  return <div class="empty">{children}</div>;
}

interface TroubleNoticeProps {
  readonly trouble: Trouble;
  readonly onRetry?: () => void;
}

/** What went wrong, where it went wrong, with its code; it stays until it is over. */
export function TroubleNotice({ trouble, onRetry }: TroubleNoticeProps) {
  return (
    <div class="notice notice-bad" role="alert">
      <p class="notice-title">{trouble.title}</p>
      <p>{trouble.detail}</p>
      <p class="quiet">
        Code <code>{trouble.code}</code>
      </p>
      {onRetry !== undefined && (
        <button type="button" class="plain" onClick={onRetry}>
          Try again
        </button>
      )}
    </div>
  );
}
