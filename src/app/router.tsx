import { createBrowserRouter } from 'react-router-dom'
import { Waiting } from '#src/components/pencil-line.tsx'
import { NothingHerePage } from '#src/pages/nothing-here-page.tsx'
import { AppShell } from './app-shell.tsx'
import { ErrorPage } from './error-page.tsx'
import { RequireSignIn } from './require-sign-in.tsx'

/** Every page comes in a piece of its own: the read view loads no editor, the sign-in page no library. */
export function createRouter() {
  return createBrowserRouter([
    {
      element: <AppShell />,
      errorElement: <ErrorPage />,
      hydrateFallbackElement: <Waiting what="Opening the library" />,
      children: [
        {
          path: '/sign-in',
          lazy: async () => ({ Component: (await import('#src/pages/sign-in-page.tsx')).SignInPage }),
        },
        {
          path: '/setup/:token',
          lazy: async () => ({ Component: (await import('#src/pages/setup-page.tsx')).SetupPage }),
        },
        {
          path: '/invitations/:token',
          lazy: async () => ({ Component: (await import('#src/pages/invitation-page.tsx')).InvitationPage }),
        },
        {
          path: '/passwords/:token',
          lazy: async () => ({ Component: (await import('#src/pages/password-link-page.tsx')).PasswordLinkPage }),
        },
        {
          path: '/',
          lazy: async () => ({ Component: (await import('#src/pages/library-page.tsx')).LibraryPage }),
        },
        {
          path: '/m/:page/:section?',
          lazy: async () => ({ Component: (await import('#src/pages/model-page.tsx')).ModelPage }),
        },
        {
          path: '/m/:page/rev/:mark',
          lazy: async () => ({ Component: (await import('#src/pages/revision-page.tsx')).RevisionPage }),
        },
        {
          element: <RequireSignIn />,
          children: [
            {
              path: '/m/:page/edit',
              lazy: async () => ({ Component: (await import('#src/pages/model-edit-page.tsx')).ModelEditPage }),
            },
            {
              path: '/reviews',
              lazy: async () => ({ Component: (await import('#src/pages/reviews-page.tsx')).ReviewsPage }),
            },
            {
              path: '/reviews/:page/:mark',
              lazy: async () => ({ Component: (await import('#src/pages/review-page.tsx')).ReviewPage }),
            },
            {
              path: '/new',
              lazy: async () => ({ Component: (await import('#src/pages/new-model-page.tsx')).NewModelPage }),
            },
            {
              path: '/groups',
              lazy: async () => ({ Component: (await import('#src/pages/groups-page.tsx')).GroupsPage }),
            },
            {
              path: '/groups/:group/:section?',
              lazy: async () => ({ Component: (await import('#src/pages/group-page.tsx')).GroupPage }),
            },
            {
              path: '/preferences',
              lazy: async () => ({ Component: (await import('#src/pages/preferences-page.tsx')).PreferencesPage }),
            },
            {
              path: '/admin/:tab?',
              lazy: async () => ({ Component: (await import('#src/pages/admin-page.tsx')).AdminPage }),
            },
          ],
        },
        { path: '*', element: <NothingHerePage /> },
      ],
    },
  ])
}
