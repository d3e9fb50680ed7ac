"""Being here, this file puts the folder on the path, so that any test can import the oracle."""
