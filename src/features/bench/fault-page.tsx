/** Pages for what cannot be shown: an address that leads nowhere, a page that failed. */
import { useRouteError } from 'react-router-dom'
import { Banner } from '../../ui/banner.tsx'
import { ButtonLink } from '../../ui/button.tsx'
import { Leaf, PageHead } from '../../ui/leaf.tsx'

export const NotFoundPage = () => (
  <Leaf>
    <PageHead
      title="There is no page at this address"
      lead="It may have been typed wrong, or what it showed is gone."
      actions={
        <ButtonLink variant="solid" to="/">
          Go to the bench
        </ButtonLink>
      }
    />
  </Leaf>
)

export function FaultPage() {
  const error = useRouteError()
  return (
    <Leaf>
      <PageHead
        title="This page could not be shown"
        actions={
          <ButtonLink variant="solid" to="/">
            Go to the bench
          </ButtonLink>
        }
      />
      <Banner title={error instanceof Error ? error.message : 'An unknown fault'}>
        What was stored is kept. Load the page again; if it fails again, tell whoever runs this installation.
      </Banner>
    </Leaf>
  )
}
