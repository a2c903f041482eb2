//! R-hat, effective sizes, batch means, quantiles, tail index, and the summary of a run.
