/** The file as a whole cannot be read; the message is a sentence for the person who sent it. Nothing was changed. */
export class UnreadableFile extends Error {}
