import type { PortFaultCode } from './types.ts';

const CODES: Readonly<Record<string, PortFaultCode>> = {
  ENOENT: 'PORT_MISSING',
  ENODEV: 'PORT_MISSING',
  ENXIO: 'PORT_MISSING',
  ENOTFOUND: 'PORT_MISSING',
  EAI_AGAIN: 'PORT_MISSING',
  EACCES: 'PORT_FORBIDDEN',
  EPERM: 'PORT_FORBIDDEN',
  EBUSY: 'PORT_BUSY',
  EADDRINUSE: 'PORT_BUSY',
  ECONNREFUSED: 'PORT_REFUSED',
  EHOSTUNREACH: 'PORT_REFUSED',
  ENETUNREACH: 'PORT_REFUSED',
  EHOSTDOWN: 'PORT_REFUSED',
  ETIMEDOUT: 'PORT_REFUSED',
  ECONNRESET: 'PORT_CLOSED',
  EPIPE: 'PORT_CLOSED',
};

/** The fault that an error of Node's own sockets stands for. */
export function socketFault(error: Error): PortFaultCode {
  return CODES[(error as NodeJS.ErrnoException).code ?? ''] ?? 'PORT_FAILED';
}

/**
 * serialport's errors carry no code, only the C library's words (glibc and macOS) or, on Windows, its own. They are
 * matched together with the words around them, because the path that follows may contain any of them.
 */
const SERIAL_MESSAGES: readonly (readonly [RegExp, PortFaultCode])[] = [
  [/Cannot lock port/, 'PORT_BUSY'],
  [/^Error:? (Device or resource busy|Resource busy|Resource temporarily unavailable)\b/, 'PORT_BUSY'],
  // Windows denies access to a COM port exactly when another program holds it.
  [/^Opening .*: Access denied$/, 'PORT_BUSY'],
  [/^Error:? (No such file or directory|No such device|No such device or address|Not a directory)\b/, 'PORT_MISSING'],
  [/^Opening .*: File not found$/, 'PORT_MISSING'],
  [/^Error:? (Permission denied|Operation not permitted)\b/, 'PORT_FORBIDDEN'],
];

/** The fault that an error from opening a serial port stands for. */
export function serialOpenFault(error: Error): PortFaultCode {
  const message = error.message.replace(/^Error: Error/, 'Error');
  return SERIAL_MESSAGES.find(([pattern]) => pattern.test(message))?.[1] ?? socketFault(error);
}

/** What an error says; those that collect several attempts say nothing themselves. */
export function detailOf(error: Error): string {
  return error.message || (error as NodeJS.ErrnoException).code || error.name;
}
