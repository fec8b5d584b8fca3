/** The mark and the name. */
import { Link } from 'react-router-dom'

export const Mark = ({ size = 16 }: { size?: number }) => (
  <svg viewBox="0 0 16 16" width={size} height={size} aria-hidden className="text-copper">
    <path
      fill="currentColor"
      d="M1 1h4v4H1zM6 1h4v4H6zM1 6h4v4H1zM6 6h4v4H6zM11 6h4v4h-4zM1 11h4v4H1zM6 11h4v4H6zM11 11h4v4h-4z"
    />
    <path fill="none" stroke="currentColor" d="M11.5 1.5h3v3h-3z" />
  </svg>
)

export const Brand = () => (
  <Link to="/" className="inline-flex items-center gap-2.5 text-read font-semibold">
    <Mark />
    Evenburn
  </Link>
)
