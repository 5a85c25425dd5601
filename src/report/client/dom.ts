/** Elements without a library. */

type Attributes = Readonly<Record<string, string | number | boolean | undefined>>

/** An element with attributes (true: present; false or undefined: absent) and children. */
export function make<K extends keyof HTMLElementTagNameMap>(
  name: K,
  attributes: Attributes,
  ...children: readonly (Node | string)[]
): HTMLElementTagNameMap[K] {
  const element = document.createElement(name)
  for (const [key, value] of Object.entries(attributes)) {
    if (value !== undefined && value !== false) element.setAttribute(key, value === true ? '' : String(value))
  }
  element.append(...children)
  return element
}

export interface Option {
  readonly value: string
  readonly label: string
}

/** Puts options into a select, if they are others than it has, and chooses one. */
export function offer(select: HTMLSelectElement, options: readonly Option[], chosen: string): void {
  const key = JSON.stringify(options)
  if (select.dataset.options !== key) {
    select.replaceChildren(...options.map(({ value, label }) => make('option', { value }, label)))
    select.dataset.options = key
  }
  select.value = chosen
  select.disabled = options.length < 2
}
