"""Currency signs and codes that a price may carry (ISO 4217)."""

from __future__ import annotations

# Source: ISO 4217, active alphabetic codes, funds and metals left out (from memory).
_CODES = """
    AED AFN ALL AMD AOA ARS AUD AWG AZN BAM BBD BDT BGN BHD BIF BMD BND BOB BRL BSD BTN BWP BYN BZD
    CAD CDF CHF CLP CNY COP CRC CUP CVE CZK DJF DKK DOP DZD EGP ERN ETB EUR FJD FKP GBP GEL GHS GIP
    GMD GNF GTQ GYD HKD HNL HTG HUF IDR ILS INR IQD IRR ISK JMD JOD JPY KES KGS KHR KMF KPW KRW KWD
    KYD KZT LAK LBP LKR LRD LSL LYD MAD MDL MGA MKD MMK MNT MOP MRU MUR MVR MWK MXN MYR MZN NAD NGN
    NIO NOK NPR NZD OMR PAB PEN PGK PHP PKR PLN PYG QAR RON RSD RUB RWF SAR SBD SCR SDG SEK SGD SHP
    SLE SOS SRD SSP STN SVC SYP SZL THB TJS TMT TND TOP TRY TTD TWD TZS UAH UGX USD UYU UZS VED VES
    VND VUV WST XAF XCD XOF XPF YER ZAR ZMW ZWG
"""
CURRENCIES = frozenset(_CODES.split())

# A bare $ or yen sign is shared by several currencies; alone it means the most traded one.
_SIGNS = {
    "€": "EUR",
    "$": "USD",
    "US$": "USD",
    "C$": "CAD",
    "CA$": "CAD",
    "A$": "AUD",
    "AU$": "AUD",
    "NZ$": "NZD",
    "HK$": "HKD",
    "S$": "SGD",
    "NT$": "TWD",
    "R$": "BRL",
    "£": "GBP",
    "¥": "JPY",
    "￥": "JPY",
    "JP¥": "JPY",
    "CN¥": "CNY",
    "₹": "INR",
    "₩": "KRW",
    "₺": "TRY",
    "₽": "RUB",
    "₴": "UAH",
    "₪": "ILS",
    "฿": "THB",
    "₫": "VND",
    "ZŁ": "PLN",
    "KČ": "CZK",
    "FT": "HUF",
}


def currency_code(mark: str) -> str | None:
    """The ISO 4217 code that a sign or code stands for, in any case; None where it is neither.

    >>> currency_code("€"), currency_code("usd"), currency_code("mV")
    ('EUR', 'USD', None)
    """
    mark = mark.strip().upper()
    return mark if mark in CURRENCIES else _SIGNS.get(mark)
