/** The example of the API description, demo and tests, kept with the check that it exercises. */
export { exampleMachine, exampleRequirement } from '../../induction/check/examples.ts';
