export { createMachine, type CreateMachineInput } from './create-machine.ts';
export { editMachine, setMachineArchived, type EditMachineInput } from './edit-machine.ts';
export { listMachines, viewMachine, type MachineListItem, type MachineView } from './list-machines.ts';
export { machineById } from './queries.ts';
