import { shallowRef } from 'vue'

export interface Question { title: string, text: string, confirm: string, danger?: boolean, answer: (yes: boolean) => void }
const question = shallowRef<Question | null>(null)

/** Asks before something that cannot be taken back: `if (await confirm({ … }))`. */
export function useConfirm() {
  const confirm = (asked: Omit<Question, 'answer'>): Promise<boolean> => new Promise((resolve) => {
    question.value?.answer(false)
    question.value = { ...asked, answer: (yes) => { question.value = null; resolve(yes) } }
  })
  return { question, confirm }
}
