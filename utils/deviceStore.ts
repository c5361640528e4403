/** The browser's own database, for what must outlive a reload without connection. */
const NAME = 'fettle'
const STORE = 'outbox'

let opened: Promise<IDBDatabase> | undefined
function open(): Promise<IDBDatabase> {
  return opened ??= new Promise((resolve, reject) => {
    const request = indexedDB.open(NAME, 1)
    request.onupgradeneeded = () => request.result.createObjectStore(STORE, { keyPath: 'order', autoIncrement: true })
    request.onsuccess = () => resolve(request.result)
    request.onerror = () => { opened = undefined; reject(request.error) }
  })
}

async function run<T>(mode: IDBTransactionMode, work: (store: IDBObjectStore) => IDBRequest<T>): Promise<T> {
  const db = await open()
  return new Promise((resolve, reject) => {
    const transaction = db.transaction(STORE, mode)
    const request = work(transaction.objectStore(STORE))
    // on disk, not only accepted
    transaction.oncomplete = () => resolve(request.result)
    transaction.onerror = transaction.onabort = () => reject(transaction.error)
  })
}

export const deviceStore = {
  add: (item: object): Promise<number> => run('readwrite', store => store.add(item) as IDBRequest<number>),
  put: (item: object): Promise<unknown> => run('readwrite', store => store.put(item)),
  remove: (order: number): Promise<unknown> => run('readwrite', store => store.delete(order)),
  all: <T>(): Promise<T[]> => run('readonly', store => store.getAll() as IDBRequest<T[]>),
}
