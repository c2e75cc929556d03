import './lib/no-eval.ts'
import './styles/index.css'
import { StrictMode } from 'react'
import { createRoot } from 'react-dom/client'
import { Providers } from './app/providers.tsx'

const root = document.getElementById('root')
if (!root) throw new Error('index.html has no element with the id root')
createRoot(root).render(
  <StrictMode>
    <Providers />
  </StrictMode>,
)
