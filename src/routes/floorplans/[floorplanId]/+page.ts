// The drawing needs a browser; nothing of this page makes sense without it.
export const ssr = false;
