/** The structure as it is drawn; figures on the command line are made from the same. */
export {
  focusOf,
  type Layout,
  skeletonOf,
  type Skeleton,
  type Wedge,
  wedgesFor,
} from '../../core/record/skeleton.ts';
