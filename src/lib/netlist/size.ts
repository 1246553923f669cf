/**
 * Nodes up to which a deck spends a simulator's time on the rare cases. A general simulator orders
 * its equations by the slopes of its first step and fills in as it goes; on large networks two
 * things then turn minutes into hours, and are left out:
 *
 * - constant-current loads that carry their law below a tenth of nominal: each follows the voltage
 *   between its rail and its ground, which couples the two grids at every load, for a law that
 *   applies only to blocks that have collapsed;
 * - a start at a known operating point, whose steep pieces stand in the way of a good order.
 */
export const SMALL_NETWORK_NODES = 5000;
