export function openThrowaway(say: (text: string) => void): Promise<{ url: string; close(): Promise<void> }>;
