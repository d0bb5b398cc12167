# A Modbus RTU server of an outside library, for peers_test.go. Numbers are laid
# out by the library, never by barline. Argument: the serial port.
import sys

from pymodbus.constants import Endian
from pymodbus.datastore import ModbusSequentialDataBlock, ModbusServerContext, ModbusSlaveContext
from pymodbus.payload import BinaryPayloadBuilder
from pymodbus.server import StartSerialServer
from pymodbus.transaction import ModbusRtuFramer


def block(offset):
    registers = []
    for byteorder in (Endian.Big, Endian.Little):
        for wordorder in (Endian.Big, Endian.Little):
            builder = BinaryPayloadBuilder(byteorder=byteorder, wordorder=wordorder)
            builder.add_32bit_float(offset + 12.375)
            registers += builder.to_registers()
    builder = BinaryPayloadBuilder(byteorder=Endian.Big, wordorder=Endian.Big)
    builder.add_16bit_int(-1234)
    builder.add_32bit_int(-70000)
    registers += builder.to_registers()
    return ModbusSequentialDataBlock(0, registers + [0] * 20)


units = {u: ModbusSlaveContext(hr=block(u), ir=block(10 * u), zero_mode=True) for u in (1, 2)}
StartSerialServer(
    context=ModbusServerContext(slaves=units, single=False),
    framer=ModbusRtuFramer,
    port=sys.argv[1],
    baudrate=19200,
    parity="N",
)
