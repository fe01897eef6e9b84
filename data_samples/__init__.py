"""The invented economy of Uldrevay and a panel of invented economies, with their truth."""
