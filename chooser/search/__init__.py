"""The search: which networks of the free stock come nearest to what is wanted, provably."""
