import type { TestProject } from 'vitest/node'
import { useScratchCluster } from './scratchCluster'

declare module 'vitest' {
  interface ProvidedContext { clusterUrl: string }
}

/** One cluster for all files of a run; each file makes its own databases in it with `scratchDatabase`. */
export default async function setup(project: TestProject) {
  const cluster = await useScratchCluster()
  project.provide('clusterUrl', cluster.url)
  return cluster.stop
}
