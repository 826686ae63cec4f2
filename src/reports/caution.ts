/** The short caution that stands at the foot of every sheet and print. */
export const CAUTION =
  'Not for medical cooling or food. Heat can kill: an unmet forecast is a warning to leave, not a promise. ' +
  'A full bank is heavy, freezes and bursts what is closed, and stands beside mains power: local codes and licensed trades first. ' +
  'Refrigerant circuits are opened by certified people only; glycol is not drinking water; standing water needs hygiene. ' +
  'Software interlocks never replace thermostats, high-pressure cut-outs, float switches and breakers.';
