"""What happens to a photon born in the film: wave optics, ray optics, and the ledger of ends."""
