"""The check documents of the contract: pydantic models, and the only validation there is."""

from server.documents.common import Adhesive, Document, Fastener, Material, Reference
from server.documents.member import MemberDocument

__all__ = ["Adhesive", "Document", "Fastener", "Material", "MemberDocument", "Reference"]
