/** Short messages after an action; each is announced once by the region in Toasts.svelte. */
import { toast } from 'svelte-sonner';

/** Something was done. */
export function sayDone(message: string, detail?: string): void {
  toast.success(message, { description: detail });
}

/** Something failed; stays until closed, since the person has to act. */
export function sayFailed(message: string, detail?: string): void {
  toast.error(message, { description: detail, duration: Number.POSITIVE_INFINITY });
}

/** Something worth knowing. */
export function sayNote(message: string, detail?: string): void {
  toast.info(message, { description: detail });
}
