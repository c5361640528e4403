/** What a device kept is sent from whatever page is open, not only from the ticket's. */
export default defineNuxtPlugin({ name: 'outbox', dependsOn: ['pinia'], setup() { useOutbox() } })
