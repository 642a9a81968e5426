"""Plans that serve every vertex: independent sets with lengths, put together part by part along clique adhesions."""
