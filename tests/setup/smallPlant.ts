import type { Knex } from 'knex'
import { fleetWeeks } from './fleetWeeks'

/** A few loops with figures, tickets and so on for the browser tests. Each area of the program adds its part here. */
export async function smallPlant(db: Knex): Promise<void> {
  await db('areas').insert([{ name: 'Kilns', position: 1 }, { name: 'Boiler house', position: 2 }])
  await fleetWeeks(db)
}
