"""The database: the only stage that speaks SQL."""
