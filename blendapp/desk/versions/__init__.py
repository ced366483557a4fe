"""The page of a formula's versions: what differs from the approved one, preparing a draft, approving it."""
