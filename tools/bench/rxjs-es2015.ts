import { register, type ResolveHook } from 'node:module';

/**
 * Node takes RxJS's ES5 build, whatever `--conditions` says: the package lists its `node` entry first. A bundler would
 * take the ES2015 one; this hook lets the bench measure what that buys.
 */
export function useEs2015Build(): void {
  const resolve: ResolveHook = async (specifier, context, next) => {
    const inside = (context.parentURL?.includes('/rxjs/dist/esm/') ?? false) && specifier.startsWith('.');
    if (specifier !== 'rxjs' && !inside) return next(specifier, context);
    const found = await next(inside ? `${specifier}.js` : specifier, { ...context, conditions: ['es2015'] });
    return { ...found, format: 'module' };
  };
  register(`data:text/javascript,${encodeURIComponent(`export const resolve = ${resolve.toString()}`)}`);
}
