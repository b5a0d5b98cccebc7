"""The page: Panel views over a session, one module a view; the look lives in ``look`` alone."""
