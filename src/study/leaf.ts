/**
 * The smallest parts of the study's schema: a value that is right or wrong by itself.
 * A leaf carries what a value must be (the issue's message) and what to write instead (its advice),
 * so that messages.ts can word every problem without knowing the key.
 */
import { z } from 'zod'

export interface Advice {
  /** What to do, where nothing better can be read off the value. */
  readonly todo: string
  /** What else a value of the wrong type could be read as: the number in "12,5", the true in "yes". */
  readonly wants?: 'number' | 'switch'
  /** The words a value may be, for the nearest one. */
  readonly options?: readonly string[]
}

/** `must` continues the key: "must be a number above 0". */
export function leaf<T>(must: string, advice: Advice, test: (value: unknown) => boolean): z.ZodType<T> {
  return z.custom<T>(test, { error: must, params: { advice } })
}

export function numberWhere(must: string, todo: string, test: (value: number) => boolean): z.ZodType<number> {
  return leaf(
    must,
    { todo, wants: 'number' },
    (value) => typeof value === 'number' && Number.isFinite(value) && test(value),
  )
}

export const finiteNumber = numberWhere('must be a finite number', 'write a number', () => true)
export const positive = numberWhere('must be a number above 0', 'write a number above 0', (value) => value > 0)
export const notNegative = numberWhere('must be 0 or more', 'write 0 or a number above it', (value) => value >= 0)

/** Non-empty text; what: "the name of a column". */
export function textFor(what: string): z.ZodType<string> {
  const advice = { todo: `write ${what}` }
  return leaf(`must be ${what}`, advice, (value) => typeof value === 'string' && value.trim() !== '')
}

export const columnName = textFor('the name of a column')
export const fileName = textFor('the path of a file')

export const trueOrFalse = leaf<boolean>(
  'must be true or false',
  { todo: 'write true or false', wants: 'switch' },
  (value) => typeof value === 'boolean',
)

/** One of `options`. */
export function oneOf<const T extends string>(options: readonly T[]): z.ZodType<T> {
  const list = `one of ${options.join(', ')}`
  return leaf<T>(`must be ${list}`, { todo: `write ${list}`, options }, (value) => options.includes(value as T))
}

/** A list of distinct items, at least one. */
export function listOf<T>(item: z.ZodType<T>, what: string): z.ZodType<T[]> {
  const advice = { todo: `list ${what}, each once` }
  return z
    .array(item)
    .refine((list) => list.length > 0, { error: 'must not be empty', params: { advice } })
    .refine((list) => new Set(list).size === list.length, { error: 'must not repeat an item', params: { advice } })
}

/** The schema is picked by the look of the value, so that a fault is told once and in the right words. */
export function choose<T>(pick: (value: unknown) => z.ZodType<T>): z.ZodType<T> {
  return z.unknown().transform((value, context) => {
    const read = pick(value).safeParse(value)
    if (read.success) return read.data
    for (const issue of read.error.issues) context.issues.push({ ...issue, input: value } as z.core.$ZodRawIssue)
    return z.NEVER
  }) as unknown as z.ZodType<T>
}

/** An object with no other keys. The message of an unknown key's issue is the list of known keys. */
export function keyed<Shape extends z.core.$ZodLooseShape>(shape: Shape): z.ZodObject<Shape, z.core.$strict> {
  const known = Object.keys(shape).join(' ')
  return z.strictObject(shape, { error: (issue) => (issue.code === 'unrecognized_keys' ? known : undefined) })
}

export function isRecord(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value)
}

/** Refuses any value of a key, in words of its own. */
export function refusal(must: string, todo: string): z.ZodType<never> {
  return leaf<never>(must, { todo }, () => false)
}
