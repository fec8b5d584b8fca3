/** Starts the pages. */
import '@fontsource/source-sans-3/latin-400.css'
import '@fontsource/source-sans-3/latin-600.css'
import '@fontsource/source-sans-3/latin-400-italic.css'
import '@fontsource/source-sans-3/greek-400.css'
import '@fontsource/source-sans-3/greek-600.css'
import './styles.css'
import { StrictMode } from 'react'
import { createRoot } from 'react-dom/client'
import { QueryClientProvider } from '@tanstack/react-query'
import { RouterProvider } from 'react-router-dom'
import { newQueryClient } from './lib/query-client.ts'
import { router } from './router.tsx'

const root = document.getElementById('root')
if (!root) throw new Error('index.html has lost its root')
createRoot(root).render(
  <StrictMode>
    <QueryClientProvider client={newQueryClient()}>
      <RouterProvider router={router} />
    </QueryClientProvider>
  </StrictMode>,
)
