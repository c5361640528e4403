export const workerArguments: string[]
