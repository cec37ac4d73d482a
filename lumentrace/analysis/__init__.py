"""From a run to numbers: measures with errors and bounds, the account, the paths."""
