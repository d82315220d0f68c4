/** Who is signed in and what they may do, under the name that the other hooks have. */
export { meKey, useMay, useMe, useRole } from './me';
