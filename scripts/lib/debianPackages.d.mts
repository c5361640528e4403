export function ensureDebianPackages(names: ('postgresql' | 'chromium')[]): Promise<void>
export function postgresPrograms(): string | null
