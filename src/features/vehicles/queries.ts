/** Server state of vehicles and their engine sheets. */
import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query'
import {
  changeVehicle,
  createVehicle,
  getVehicle,
  listVehicles,
  writeEngineSheet,
  type EngineSheetInput,
} from '../../../shared/contract/vehicles.ts'
import { call } from '../../lib/api.ts'

export const vehicleQueries = {
  all: () => ['vehicles'] as const,
  list: () =>
    queryOptions({
      queryKey: [...vehicleQueries.all(), 'list'],
      queryFn: ({ signal }) => call(listVehicles, { signal }),
    }),
  detail: (vehicleId: string) =>
    queryOptions({
      queryKey: [...vehicleQueries.all(), 'detail', vehicleId],
      queryFn: ({ signal }) => call(getVehicle, { params: { vehicleId }, signal }),
    }),
}

export function useCreateVehicle() {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: { name: string; description: string; sheet?: EngineSheetInput }) =>
      call(createVehicle, { body }),
    onSuccess: () => client.invalidateQueries({ queryKey: vehicleQueries.all() }),
  })
}

export function useChangeVehicle(vehicleId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: {
      version: number
      name?: string
      description?: string
      archived?: boolean
      ownerIds?: string[]
    }) => call(changeVehicle, { params: { vehicleId }, body }),
    onSuccess: () => client.invalidateQueries({ queryKey: vehicleQueries.all() }),
  })
}

export function useWriteEngineSheet(vehicleId: string) {
  const client = useQueryClient()
  return useMutation({
    mutationFn: (body: EngineSheetInput) => call(writeEngineSheet, { params: { vehicleId }, body }),
    onSuccess: () => client.invalidateQueries({ queryKey: vehicleQueries.all() }),
  })
}
