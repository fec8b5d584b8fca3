/** Pages in jsdom: matchers for what a user sees, and a clean document after each test. */
import '@testing-library/jest-dom/vitest'
import { cleanup } from '@testing-library/react'
import { afterEach } from 'vitest'

afterEach(cleanup)
