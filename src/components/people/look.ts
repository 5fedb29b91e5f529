/** Class names that the people's islands share. */
const focus = 'outline-offset-2 focus-visible:outline-2 focus-visible:outline-teal';
export const plainButton = `h-8 rounded border border-muted px-3 text-sm whitespace-nowrap hover:bg-pick disabled:opacity-50 ${focus}`;
export const mainButton = `h-9 rounded border border-teal bg-teal px-4 font-medium text-sheet hover:opacity-90 disabled:opacity-50 ${focus}`;
export const gravestButton = `h-9 rounded border border-hull px-4 font-medium text-hull hover:bg-hull-wash disabled:opacity-50 ${focus}`;
export const field = `h-9 w-full rounded border bg-sheet px-3 text-ink ${focus}`;
export const tick = `size-4 accent-teal ${focus}`;
