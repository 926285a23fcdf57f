"""The shop: jobs, materials, forming laws, moulds, turning, proofs and the command."""
