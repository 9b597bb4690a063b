// What stands wherever the user is about to act on a machine.

/** For every change of a setting. */
export const CAUTION =
  "Changing a gain on an energised axis can cause sudden motion. Keep people clear and the emergency stop in reach; limit travel, " +
  "speed, pressure or temperature first. A model is not the machine. Follow the maker’s manual, the site’s rules and local codes; " +
  "the work belongs to competent, authorised people.";

/** For the search for the limit. */
export const LIMIT_CAUTION =
  "Never drive an energised machine to its limit of stability without the approval of its maker and of the site. " + CAUTION;
