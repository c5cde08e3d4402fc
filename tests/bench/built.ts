/** What a folder of the built program offers at its door: `await built<typeof import('...')>('study')`. */
export type Built = <Door>(folder: string) => Promise<Door>;
