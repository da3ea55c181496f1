"""What is demanded: limits, facts and the catalogue of rules."""
