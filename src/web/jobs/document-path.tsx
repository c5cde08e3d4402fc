import { Fragment } from 'preact';

/** A place in a document, such as `loops[2].controller.scan`; it breaks between keys and not in one. */
export function DocumentPath({ path }: { readonly path: string }) {
  if (path === '') return <>document</>;
  const keys = path.split(/(?<=\.)/);
  return (
    <code class="document-path">
      {keys.map((key, index) => (
        <Fragment key={index}>
          {index > 0 && <wbr />}
          {key}
        </Fragment>
      ))}
    </code>
  );
}
