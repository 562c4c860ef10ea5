"""What an estimate of this kind can and cannot claim; every report carries it once."""

CAUTION = (
    "These are estimates for choosing parts while a board is still being designed. "
    "The stated error of an emission level is ±10 dB for a trace and ±15 dB where a cable takes "
    "part; two settings of one net compare better than that, because errors of the geometry "
    "cancel. "
    "Nothing here is a test result, evidence of conformity or a reason to skip a measurement: "
    "the finished product measured by a competent laboratory and the rules of the market decide. "
    "Limit lines change with their edition: compare the ones used here with the text in force. "
    "Slots in planes, connectors, supply and package currents, immunity, electrostatic discharge, "
    "radio and safety are not judged."
)
