"""Theory against records: series, lags with intervals, verdicts, moorings, model output."""
