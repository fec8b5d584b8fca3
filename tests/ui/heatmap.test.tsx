/** The heatmap as a person with a keyboard or a screen reader meets it. */
import { fireEvent, render, screen } from '@testing-library/react'
import { useState } from 'react'
import { describe, expect, test, vi } from 'vitest'
import { Heatmap, type Selection } from '../../src/ui/heatmap/heatmap.tsx'

const grid = { rpm: [1000, 2000, 3000], mapKpa: [40, 70, 100] }
const values = [50, 52, 54, 60, 62, 64, 70, 72, null]

function Board({ onKey, onSeen }: { onKey?: () => void; onSeen?: (selection: Selection | null) => void }) {
  const [selection, setSelection] = useState<Selection | null>(null)
  return (
    <Heatmap
      label="Test table"
      grid={grid}
      values={values}
      view="magnitude"
      format={(value) => value.toFixed(1)}
      none={(cell) => cell === 8}
      mark={(cell) => (cell === 4 ? 'pinned' : null)}
      selection={selection}
      onSelect={(next) => {
        setSelection(next)
        onSeen?.(next)
      }}
      cellLabel={(cell) => `cell ${cell}`}
      {...(onKey ? { onKey } : {})}
    />
  )
}

describe('the heatmap', () => {
  test('is a grid with row and column headers, load rising upward', () => {
    render(<Board />)
    expect(screen.getByRole('grid', { name: 'Test table' })).toBeVisible()
    expect(screen.getAllByRole('rowheader').map((head) => head.textContent)).toEqual(['kPa100', '70', '40'])
    expect(screen.getAllByRole('columnheader').map((head) => head.textContent)).toEqual(['rpm', '1000', '2000', '3000'])
  })

  test('has one tab stop, and arrows move it', () => {
    render(<Board />)
    const cells = screen.getAllByRole('gridcell')
    expect(cells.filter((cell) => cell.tabIndex === 0)).toHaveLength(1)
    const first = screen.getByRole('gridcell', { name: 'cell 0' })
    first.focus()
    fireEvent.keyDown(first, { key: 'ArrowUp' })
    expect(screen.getByRole('gridcell', { name: 'cell 3' })).toHaveFocus()
    fireEvent.keyDown(screen.getByRole('gridcell', { name: 'cell 3' }), { key: 'ArrowRight' })
    expect(screen.getByRole('gridcell', { name: 'cell 4' })).toHaveAttribute('aria-selected', 'true')
  })

  test('Shift extends to a rectangle, Escape lets go', () => {
    render(<Board />)
    const first = screen.getByRole('gridcell', { name: 'cell 0' })
    first.focus()
    fireEvent.keyDown(first, { key: 'ArrowRight', shiftKey: true })
    fireEvent.keyDown(first, { key: 'ArrowUp', shiftKey: true })
    const chosen = () =>
      screen
        .getAllByRole('gridcell')
        .filter((cell) => cell.getAttribute('aria-selected') === 'true')
        .map((cell) => cell.getAttribute('aria-label'))
    expect(chosen()).toEqual(['cell 3', 'cell 4', 'cell 0', 'cell 1'])
    fireEvent.keyDown(first, { key: 'Escape' })
    expect(chosen()).toEqual([])
  })

  test('other keys are the page’s', () => {
    const onKey = vi.fn()
    render(<Board onKey={onKey} />)
    const first = screen.getByRole('gridcell', { name: 'cell 0' })
    first.focus()
    fireEvent.keyDown(first, { key: 'k' })
    expect(onKey).toHaveBeenCalledOnce()
  })

  test('a cell without evidence is hatched and takes no tone', () => {
    render(<Board />)
    const cell = screen.getByRole('gridcell', { name: 'cell 8' })
    expect(cell).toHaveClass('none')
    expect(cell.getAttribute('style')).toBeNull()
  })
})
