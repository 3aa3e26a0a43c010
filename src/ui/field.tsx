import type { InputHTMLAttributes, ReactNode, SelectHTMLAttributes, TextareaHTMLAttributes } from 'react'

interface FieldParts {
  /** Also the id that an error summary links to. */
  readonly name: string
  readonly label: ReactNode
  readonly hint?: ReactNode
  readonly error?: string | undefined
}

interface FrameProps extends FieldParts {
  readonly className?: string | undefined
  readonly children: (aria: { id: string; 'aria-invalid'?: true; 'aria-describedby'?: string }) => ReactNode
}

/** Label, hint, error and control, tied together for assistive technology. */
export function Field({ name, label, hint, error, className, children }: FrameProps) {
  const described = [hint ? `${name}-hint` : null, error ? `${name}-error` : null].filter(Boolean).join(' ')
  return (
    <div className={`field${error ? ' bad' : ''}${className ? ` ${className}` : ''}`}>
      <label htmlFor={name}>{label}</label>
      {hint ? (
        <p className="hint" id={`${name}-hint`}>
          {hint}
        </p>
      ) : null}
      {error ? (
        <p className="fault" id={`${name}-error`}>
          <b>Error:</b> {error}
        </p>
      ) : null}
      {children({
        id: name,
        ...(error ? { 'aria-invalid': true } : {}),
        ...(described ? { 'aria-describedby': described } : {}),
      })}
    </div>
  )
}

type Size = 'short' | 'wide'
const inputClass = (size?: Size) => (size ? `input ${size}` : 'input')

type TextFieldProps = FieldParts &
  Omit<InputHTMLAttributes<HTMLInputElement>, 'name' | 'size'> & { readonly size?: Size; readonly fieldClass?: string }

export function TextField({ name, label, hint, error, size, fieldClass, ...input }: TextFieldProps) {
  return (
    <Field name={name} label={label} hint={hint} error={error} className={fieldClass}>
      {(aria) => <input type="text" {...input} {...aria} name={name} className={inputClass(size)} />}
    </Field>
  )
}

type TextAreaProps = FieldParts & Omit<TextareaHTMLAttributes<HTMLTextAreaElement>, 'name'>

export function TextArea({ name, label, hint, error, ...area }: TextAreaProps) {
  return (
    <Field name={name} label={label} hint={hint} error={error}>
      {(aria) => <textarea {...area} {...aria} name={name} className="input" />}
    </Field>
  )
}

type SelectFieldProps = FieldParts &
  Omit<SelectHTMLAttributes<HTMLSelectElement>, 'name' | 'size'> & {
    readonly options: readonly { readonly value: string; readonly text: string }[]
    readonly fieldClass?: string
  }

export function SelectField({ name, label, hint, error, options, fieldClass, ...select }: SelectFieldProps) {
  return (
    <Field name={name} label={label} hint={hint} error={error} className={fieldClass}>
      {(aria) => (
        <select {...select} {...aria} name={name} className="input">
          {options.map((option) => (
            <option key={option.value} value={option.value}>
              {option.text}
            </option>
          ))}
        </select>
      )}
    </Field>
  )
}

type TickFieldProps = FieldParts & Omit<InputHTMLAttributes<HTMLInputElement>, 'name' | 'type'>

/** One box to tick, its words beside it. */
export function TickField({ name, label, hint, error, ...input }: TickFieldProps) {
  return (
    <div className={`field${error ? ' bad' : ''}`}>
      {error ? (
        <p className="fault" id={`${name}-error`}>
          <b>Error:</b> {error}
        </p>
      ) : null}
      <span className="tick">
        <input
          {...input}
          type="checkbox"
          id={name}
          name={name}
          aria-invalid={error ? true : undefined}
          aria-describedby={error ? `${name}-error` : undefined}
        />
        <label htmlFor={name}>
          {label}
          {hint ? <span className="hint block">{hint}</span> : null}
        </label>
      </span>
    </div>
  )
}

interface RadioFieldProps {
  /** Also the id of the first choice, to which an error summary links. */
  readonly name: string
  readonly legend: ReactNode
  readonly error?: string | undefined
  readonly defaultValue: string
  readonly options: readonly { readonly value: string; readonly text: ReactNode; readonly hint?: ReactNode }[]
}

/** One of a few choices whose words need more room than a list that drops down has. */
export function RadioField({ name, legend, error, defaultValue, options }: RadioFieldProps) {
  const idOf = (value: string, index: number) => (index === 0 ? name : `${name}-${value}`)
  return (
    <fieldset className={`field${error ? ' bad' : ''}`} aria-describedby={error ? `${name}-error` : undefined}>
      <legend>{legend}</legend>
      {error ? (
        <p className="fault" id={`${name}-error`}>
          <b>Error:</b> {error}
        </p>
      ) : null}
      {options.map(({ value, text, hint }, index) => (
        <span className="tick choice" key={value}>
          <input
            type="radio"
            name={name}
            id={idOf(value, index)}
            value={value}
            defaultChecked={value === defaultValue}
            aria-describedby={hint ? `${idOf(value, index)}-hint` : undefined}
          />
          <span>
            <label htmlFor={idOf(value, index)}>{text}</label>
            {hint ? (
              <span className="hint block" id={`${idOf(value, index)}-hint`}>
                {hint}
              </span>
            ) : null}
          </span>
        </span>
      ))}
    </fieldset>
  )
}
