/** Where the bench leaves a requirement for the page that begins a request, in the browser's session. */
export const benchKey = 'coilyard-bench-requirement';
