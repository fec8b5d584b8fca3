/** Server state of notices and of what a person chose. */
import { infiniteQueryOptions, queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  getNoticeChoices,
  listNotices,
  readNotices,
  setNoticeChoices,
  type NoticeChoice,
} from '../../../shared/contract/notices.ts'
import { call } from '../../lib/api.ts'

export const noticeQueries = {
  all: () => ['notices'] as const,
  list: () =>
    infiniteQueryOptions({
      queryKey: [...noticeQueries.all(), 'list'],
      queryFn: ({ signal, pageParam }) =>
        call(listNotices, { query: pageParam === null ? {} : { before: pageParam }, signal }),
      initialPageParam: null as number | null,
      getNextPageParam: (page) => page.next,
    }),
  /** For the head of every page; asked for again once a minute while the page is seen. */
  unread: () =>
    queryOptions({
      queryKey: [...noticeQueries.all(), 'unread'],
      queryFn: async ({ signal }) => (await call(listNotices, { query: {}, signal })).unread,
      refetchInterval: 60_000,
    }),
  choices: () =>
    queryOptions({
      queryKey: [...noticeQueries.all(), 'choices'],
      queryFn: ({ signal }) => call(getNoticeChoices, { signal }),
    }),
}

export function useNoticeChanges() {
  const client = useQueryClient()
  const onSuccess = () => client.invalidateQueries({ queryKey: noticeQueries.all() })
  return {
    read: useMutation({ mutationFn: (upTo: number) => call(readNotices, { body: { upTo } }), onSuccess }),
    choose: useMutation({
      mutationFn: (choice: NoticeChoice) => call(setNoticeChoices, { body: { choices: [choice] } }),
      onSuccess,
    }),
  }
}
