import { api } from './api-client';

/** Opens a session; ApiError 401 when address and password do not belong together. */
export async function signIn(values: { email: string; password: string }): Promise<void> {
  await api('/auth/sign-in/email', { method: 'POST', body: values });
}

export async function signOut(): Promise<void> {
  await api('/auth/sign-out', { method: 'POST', body: {} });
}
