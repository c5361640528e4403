import { Refusal } from '../refusal'

export const noSuchTicket = () => new Refusal(404, 'not_found', 'This ticket was not found.')
