/** The table editor by keyboard: typing, ranges, arithmetic, copy and paste, undo. */
import { createEvent, fireEvent, render, screen } from '@testing-library/react'
import { useState } from 'react'
import { describe, expect, test } from 'vitest'
import type { Selection } from '../../src/ui/heatmap/selection.ts'
import { TableEditor } from '../../src/ui/heatmap/table-editor.tsx'
import { useHistory } from '../../src/ui/heatmap/use-history.ts'

const grid = { rpm: [1000, 2000, 3000], mapKpa: [40, 70, 100] }
const start = [50, 52, 54, 60, 62, 64, 70, 72, 74]

function Board({ mayEdit = true }: { mayEdit?: boolean }) {
  const [selection, setSelection] = useState<Selection | null>(null)
  const [mark, setMark] = useState<'point' | 'comma'>('comma')
  const history = useHistory<readonly number[]>(start)
  return (
    <TableEditor
      label="Test table"
      grid={grid}
      values={history.now}
      edited={history.now}
      view="magnitude"
      format={(value) => value.toFixed(1)}
      none={() => false}
      mayEdit={mayEdit}
      limits={{ min: 1, max: 200, digits: 1, quantity: 'VE, %' }}
      decimalMark={mark}
      onDecimalMark={setMark}
      locked={(cell) => cell === 8}
      onEdit={(cells) =>
        history.set(history.now.map((value, cell) => cells.find((c) => c.cell === cell)?.value ?? value))
      }
      onUndo={history.undo}
      onRedo={history.redo}
      selection={selection}
      onSelect={setSelection}
      cellLabel={(cell) => `cell ${cell}`}
    />
  )
}

const cell = (n: number) => screen.getByRole('gridcell', { name: `cell ${n}` })
const at = (n: number) => {
  fireEvent.mouseDown(cell(n))
  cell(n).focus()
}
const key = (name: string, more: object = {}) => fireEvent.keyDown(document.activeElement!, { key: name, ...more })
const shown = () => Array.from({ length: 9 }, (_, n) => Number(cell(n).textContent))

describe('the table editor', () => {
  test('a figure typed goes into every selected cell, Escape gives it up, Ctrl+Z takes it back', () => {
    render(<Board />)
    at(0)
    key('ArrowRight', { shiftKey: true })
    key('6')
    const field = screen.getByRole('textbox', { name: 'VE, %, for every selected cell' })
    fireEvent.change(field, { target: { value: '61,5' } })
    fireEvent.keyDown(field, { key: 'Enter' })
    expect(shown().slice(0, 3)).toEqual([61.5, 61.5, 54])
    expect(cell(1)).toHaveFocus()
    key('7')
    fireEvent.keyDown(screen.getByRole('textbox'), { key: 'Escape' })
    expect(shown()[0]).toBe(61.5)
    key('z', { ctrlKey: true })
    expect(shown()).toEqual(start)
    key('z', { ctrlKey: true, shiftKey: true })
    expect(shown()[0]).toBe(61.5)
  })

  test('leaving the cell by mouse keeps what was typed, in the cells it was typed for', () => {
    render(<Board />)
    at(0)
    key('6')
    fireEvent.change(screen.getByRole('textbox'), { target: { value: '66' } })
    fireEvent.mouseDown(cell(4))
    expect(shown()[0]).toBe(66)
    expect(shown()[4]).toBe(62)
  })

  test('Shift and Space select the row, Ctrl and Space the column, heads do it by mouse', () => {
    render(<Board />)
    const chosen = () =>
      screen
        .getAllByRole('gridcell')
        .filter((each) => each.getAttribute('aria-selected') === 'true')
        .map((each) => Number(each.dataset['cell']))
        .toSorted((a, b) => a - b)
    at(4)
    key(' ', { shiftKey: true })
    expect(chosen()).toEqual([3, 4, 5])
    fireEvent.keyDown(cell(4), { key: ' ', ctrlKey: true })
    expect(chosen()).toEqual([0, 3, 6])
    fireEvent.click(screen.getByRole('columnheader', { name: '2000' }))
    expect(chosen()).toEqual([1, 4, 7])
  })

  test('arithmetic says what it will come to, and leaves pinned cells', () => {
    render(<Board />)
    at(6)
    key(' ', { shiftKey: true })
    key('=')
    const amount = screen.getByRole('textbox', { name: /Amount/ })
    fireEvent.change(amount, { target: { value: '10' } })
    expect(screen.getByText('3 cells become 77.0 to 81.4.')).toBeVisible()
    fireEvent.click(screen.getByRole('button', { name: 'Change 3 cells' }))
    expect(shown().slice(6)).toEqual([77, 79.2, 74])
    expect(screen.getByText('2 cells set. 1 pinned cell stays.')).toBeVisible()
  })

  test('copy writes the rectangle with the mark chosen, paste reads it back elsewhere', () => {
    render(<Board />)
    at(0)
    key('ArrowUp', { shiftKey: true })
    const copied: Record<string, string> = {}
    const copy = createEvent.copy(cell(3))
    Object.assign(copy, { clipboardData: { setData: (kind: string, text: string) => (copied[kind] = text) } })
    fireEvent(cell(3), copy)
    expect(copied['text/plain']).toBe('60\n50')
    at(7)
    fireEvent.paste(cell(7), { clipboardData: { getData: () => '71,5\n61,5' } })
    expect([shown()[7], shown()[4]]).toEqual([71.5, 61.5])
    fireEvent.paste(cell(7), { clipboardData: { getData: () => 'rich' } })
    expect(screen.getByText(/“rich” is not a number/)).toBeVisible()
  })

  test('who may not edit cannot type, paste or calculate', () => {
    render(<Board mayEdit={false} />)
    at(0)
    key('6')
    key('=')
    fireEvent.paste(cell(0), { clipboardData: { getData: () => '99' } })
    expect(screen.queryByRole('textbox')).toBeNull()
    expect(shown()).toEqual(start)
  })
})
