import { describe, expect, it } from 'vitest';
import { detailOf, serialOpenFault, socketFault } from '../../src/port/faults.ts';

describe('the fault behind an error of a serial port', () => {
  // The sentences are those of @serialport/bindings-cpp 13.0.0, src/serialport_unix.cpp and src/serialport_win.cpp,
  // with the texts that strerror has for the error numbers in glibc and macOS.
  it.each([
    ['Error: No such file or directory, cannot open /dev/ttyACM0', 'PORT_MISSING'],
    ['Error: No such device, cannot open /dev/ttyUSB0', 'PORT_MISSING'],
    ['Error: No such device or address, cannot open /dev/ttyS9', 'PORT_MISSING'],
    ['Opening COM3: File not found', 'PORT_MISSING'],
    ['Error: Permission denied, cannot open /dev/ttyACM0', 'PORT_FORBIDDEN'],
    ['Error: Operation not permitted, cannot open /dev/ttyACM0', 'PORT_FORBIDDEN'],
    ['Error: Device or resource busy, cannot open /dev/ttyACM0', 'PORT_BUSY'],
    ['Error: Resource busy, cannot open /dev/cu.usbmodem1', 'PORT_BUSY'],
    ['Error Resource temporarily unavailable Cannot lock port', 'PORT_BUSY'],
    ['Error: Error Resource temporarily unavailable Cannot lock port', 'PORT_BUSY'],
    ['Opening COM3: Access denied', 'PORT_BUSY'],
    ['Error: Inappropriate ioctl for device setting custom baud rate of 115200', 'PORT_FAILED'],
    ['Opening COM3: Unknown error code 31', 'PORT_FAILED'],
  ])('%s: %s', (message, code) => {
    expect(serialOpenFault(new Error(message))).toBe(code);
  });

  it('is not read from the path', () => {
    const path = '/dev/serial/by-id/usb-Permission denied, Resource busy, No such device-if00';
    expect(serialOpenFault(new Error(`Error: Is a directory, cannot open ${path}`))).toBe('PORT_FAILED');
  });
});

describe('the fault behind an error of a socket', () => {
  it.each([
    ['ENOTFOUND', 'PORT_MISSING'],
    ['EAI_AGAIN', 'PORT_MISSING'],
    ['ECONNREFUSED', 'PORT_REFUSED'],
    ['EHOSTUNREACH', 'PORT_REFUSED'],
    ['ENETUNREACH', 'PORT_REFUSED'],
    ['ETIMEDOUT', 'PORT_REFUSED'],
    ['ECONNRESET', 'PORT_CLOSED'],
    ['EPIPE', 'PORT_CLOSED'],
    ['EACCES', 'PORT_FORBIDDEN'],
    ['EADDRINUSE', 'PORT_BUSY'],
    ['EMFILE', 'PORT_FAILED'],
  ])('%s: %s', (code, fault) => {
    expect(socketFault(Object.assign(new Error('any words'), { code }))).toBe(fault);
  });

  it('has a detail even where the error has no message, as when every address of a host refused', () => {
    const error = Object.assign(new AggregateError([new Error('a'), new Error('b')]), { code: 'ECONNREFUSED' });
    expect(detailOf(error)).toBe('ECONNREFUSED');
    expect(detailOf(new Error('plain'))).toBe('plain');
    expect(detailOf(new TypeError())).toBe('TypeError');
  });
});
